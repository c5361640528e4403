import { z } from 'zod'
import { endSubscription } from '../../../db/repositories/digests'

/** RFC 8058 one-click unsubscribe: a POST without cookie ends the subscription. There is no GET that does. */
export default defineEventHandler(async (event) => {
  const { token } = await readInput(event, z.object({ token: z.string().min(6).max(60) }), 'params')
  if (!await endSubscription(database(), token)) throw refusal(404, 'not_found', 'This address is not known; perhaps the subscription was made anew.')
  setResponseHeader(event, 'Content-Type', 'text/plain; charset=utf-8')
  return 'You will not get the weekly digest any more.'
})
