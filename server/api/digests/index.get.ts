import { listDigestMails, listSubscribers } from '../../../db/repositories/digests'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  const [mails, subscribers] = await Promise.all([listDigestMails(database()), listSubscribers(database())])
  return { mails, subscribers: subscribers.map(({ unsubscribeToken: _, ...rest }) => rest) }
})
