import { onScopeDispose, shallowRef } from 'vue'

export interface Shortcut {
  /** as on the keyboard: `/`, `?`, `ArrowDown` */
  key: string
  /** how the help names it, where that differs from the key */
  shown?: string
  help: string
  run: (event: KeyboardEvent) => void
}

const active = shallowRef<Shortcut[]>([])
let listening = false

const isTyping = (target: EventTarget | null): boolean =>
  target instanceof HTMLElement && (target.isContentEditable || /^(INPUT|TEXTAREA|SELECT)$/.test(target.tagName))

function onKey(event: KeyboardEvent): void {
  if (event.defaultPrevented || event.ctrlKey || event.metaKey || event.altKey || isTyping(event.target) || document.querySelector('dialog[open]')) return
  // the newest first: a page goes before the shell
  for (const shortcut of [...active.value].reverse()) if (shortcut.key === event.key) { shortcut.run(event); return }
}

/** Keys of a page or of the shell, gone with it; the keyboard help lists what is active. */
export function useShortcuts(shortcuts: Shortcut[]): { active: typeof active } {
  if (!listening) { listening = true; window.addEventListener('keydown', onKey) }
  active.value = [...active.value, ...shortcuts]
  onScopeDispose(() => { active.value = active.value.filter(s => !shortcuts.includes(s)) })
  return { active }
}
