import { onScopeDispose, ref } from 'vue'

/** Whether the page is as narrow as a phone: the width of the style sheet's `phone:`. */
export function useNarrow() {
  const query = window.matchMedia('(max-width: 639px)')
  const narrow = ref(query.matches)
  const listen = () => { narrow.value = query.matches }
  query.addEventListener('change', listen)
  onScopeDispose(() => query.removeEventListener('change', listen))
  return narrow
}
