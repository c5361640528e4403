import { shallowRef } from 'vue'

export interface Toast { id: number, text: string, kind: 'done' | 'failed', action?: { label: string, run: () => void } }

const toasts = shallowRef<Toast[]>([])
let next = 1

/** Short messages at the edge of the page. What failed stays until it is closed; what was done goes by itself. */
export function useToasts() {
  const close = (id: number) => { toasts.value = toasts.value.filter(t => t.id !== id) }
  function add(kind: Toast['kind'], text: string, action?: Toast['action']): void {
    const id = next++
    toasts.value = [...toasts.value.slice(-3), { id, text, kind, action }]
    if (kind === 'done') setTimeout(() => close(id), action ? 10_000 : 5_000)
  }
  return {
    toasts, close,
    done: (text: string, action?: Toast['action']) => add('done', text, action),
    failed: (error: unknown) => add('failed', typeof error === 'string' ? error : toFailure(error).message),
  }
}
