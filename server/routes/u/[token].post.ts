import { z } from 'zod'
import { unsubscribe } from '../../services/digest/subscriptions'

const params = z.object({ token: z.string().min(6).max(60) })

/** RFC 8058 one-click unsubscribe: a POST without cookie ends the subscription. There is no GET that does. */
export default defineEventHandler(async (event) => {
  const { token } = await readInput(event, params, 'params')
  await unsubscribe(database(), token)
  setResponseHeader(event, 'Content-Type', 'text/plain; charset=utf-8')
  return 'You will not get the weekly digest any more.'
})
