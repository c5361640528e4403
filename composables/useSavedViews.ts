import { ref } from 'vue'
import type { SavedView } from '#shared/types/fleet'

/** Saved views of the fleet table: own and shared. */
export function useSavedViews() {
  const api = useApi()
  const { done, failed } = useToasts()
  const views = ref<SavedView[]>([])
  async function run(call: Promise<{ views: SavedView[] }>, text?: string): Promise<void> {
    try {
      views.value = (await call).views
      if (text) done(text)
    }
    catch (error) { failed(error) }
  }
  return {
    views,
    load: () => run(api.get('/api/saved-views')),
    save: (name: string, query: string, shared: boolean) => run(api.post('/api/saved-views', { name, query, shared }), `Saved as “${name}”.`),
    remove: (view: SavedView) => run(api.del(`/api/saved-views/${view.id}`), `The view “${view.name}” is gone.`),
  }
}
