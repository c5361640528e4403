import { computed, onMounted, onScopeDispose, ref, watch, type Ref } from 'vue'
import { rowWindow } from '#shared/format/rowWindow'

/**
 * Which rows of equal height are to be drawn while a list scrolls, inside an element or with the page.
 * @param list the element whose rows these are; with `page` its place on the page counts, else its own scrolling
 */
export function useRowWindow(list: Ref<HTMLElement | null>, options: { count: () => number, rowHeight: number, page?: boolean, spare?: number }) {
  const scrolled = ref(0)
  const visible = ref(800)
  let frame = 0
  function measure(): void {
    frame = 0
    const element = list.value
    if (!element) return
    scrolled.value = options.page ? Math.max(0, -element.getBoundingClientRect().top) : element.scrollTop
    visible.value = options.page ? window.innerHeight : element.clientHeight
  }
  const later = () => { frame ||= requestAnimationFrame(measure) }
  const observer = new ResizeObserver(later)
  watch(list, (element, before) => {
    if (before) { observer.unobserve(before); before.removeEventListener('scroll', later) }
    if (element) { observer.observe(element); element.addEventListener('scroll', later, { passive: true }); measure() }
  }, { flush: 'post' })
  onMounted(() => {
    if (options.page) { window.addEventListener('scroll', later, { passive: true }); window.addEventListener('resize', later) }
    measure()
  })
  onScopeDispose(() => {
    cancelAnimationFrame(frame)
    observer.disconnect()
    window.removeEventListener('scroll', later)
    window.removeEventListener('resize', later)
  })
  const shown = computed(() => rowWindow({ count: options.count(), rowHeight: options.rowHeight, scrolled: scrolled.value, visible: visible.value, spare: options.spare ?? 8 }))
  return { shown, measure }
}
