import { ref } from 'vue'

/** One send at a time, and what the server found wrong beside the field it belongs to. */
export function useForm() {
  const busy = ref(false)
  const message = ref('')
  const issues = ref<Record<string, string>>({})

  /** True when it went through. What concerns no field goes to `message`. */
  async function send(work: () => Promise<unknown>): Promise<boolean> {
    if (busy.value) return false
    busy.value = true
    message.value = ''
    issues.value = {}
    try {
      await work()
      return true
    }
    catch (error) {
      const failure = toFailure(error)
      issues.value = Object.fromEntries(failure.issues.filter(i => i.path).map(i => [i.path, i.message]))
      if (!Object.keys(issues.value).length) message.value = failure.message
      return false
    }
    finally { busy.value = false }
  }
  return { busy, message, issues, send }
}
