import { listCaughtMails } from '../../../../db/repositories/mails'

/** `catching` tells whether mail ends here at all, or goes to a server of the site. */
export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  return { catching: !environment().SMTP_URL, mails: await listCaughtMails(database()) }
})
