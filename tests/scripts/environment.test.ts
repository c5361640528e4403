import { describe, expect, it } from 'vitest'
import { readEnvironment } from '../../server/services/environment'

const url = { DATABASE_URL: 'postgres://user@host/db' }

describe('settings of the environment', () => {
  it('have the defaults of the contract', () => {
    expect(readEnvironment(url)).toMatchObject({ HOST: '127.0.0.1', PORT: 3000, DATA_DIR: '.data', DEMO: 'on', UPLOAD_LIMIT_BYTES: 20 * 1024 ** 3, PUBLIC_URL: 'http://127.0.0.1:3000' })
  })
  it.each([
    [{ PORT: 'eighty' }, /PORT must be a whole number from 1 to 65535\.$/], [{ PORT: '70000' }, /PORT must be a whole number/], [{ DEMO: 'yes' }, /DEMO must be on or off\.$/], [{ WORKER_THREADS: '0' }, /WORKER_THREADS must be a whole number from 1 to 64\.$/], [{ DATABASE_URL: 'mysql://x' }, /DATABASE_URL must begin with postgres/],
    [{ SMTP_URL: 'mail.site.example' }, /SMTP_URL must begin with smtp:\/\/ or smtps:\/\/\.$/], [{ PUBLIC_URL: 'fettle.site.example' }, /PUBLIC_URL must begin with http/],
    [{ ADMIN_EMAIL: 'nobody' }, /ADMIN_EMAIL must be an e-mail address/], [{ ADMIN_PASSWORD: 'short' }, /ADMIN_PASSWORD must have at least 12/], [{ UPLOAD_LIMIT_BYTES: '-1' }, /UPLOAD_LIMIT_BYTES/],
    [{ DATABASE_URL: 'postgres://user:pa#ss/word@host:port/db' }, /DATABASE_URL is no address/], [{ SMTP_URL: 'smtp://' }, /SMTP_URL is no address/], [{ SMTP_URL: 'smtp://mail:smtp' }, /SMTP_URL is no address/],
    [{ PUBLIC_URL: 'https://' }, /PUBLIC_URL is no address/], [{ MAIL_FROM: 'Fettle' }, /MAIL_FROM must be an address/], [{ TRUST_PROXY: '10.0.0.1' }, /TRUST_PROXY/],
  ])('%j stops with a sentence that names it', (wrong, sentence) => {
    expect(() => readEnvironment({ ...url, ...wrong } as Record<string, string>)).toThrow(sentence)
  })
  it('several wrong ones are named together', () => {
    expect(() => readEnvironment({ ...url, PORT: 'x', DEMO: 'x' })).toThrow(/PORT.*DEMO/)
  })
  it('blank counts as unset, and other variables are left alone', () => {
    const given = { ...url, PORT: '', SMTP_URL: '', PATH: '/bin' }
    expect(readEnvironment(given).PORT).toBe(3000)
    expect(given).toEqual({ ...url, PORT: '', SMTP_URL: '', PATH: '/bin' })
  })
  it('a closing slash of PUBLIC_URL is dropped, so that links have one', () => {
    expect(readEnvironment({ ...url, PUBLIC_URL: 'https://fettle.site.example/' }).PUBLIC_URL).toBe('https://fettle.site.example')
  })
})
