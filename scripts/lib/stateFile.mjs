import { chmodSync, cpSync, existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { dirname, join, resolve } from 'node:path'
import { postgresPrograms } from './debianPackages.mjs'
import { root } from './paths.mjs'
import { run } from './run.mjs'
import { Stop } from './say.mjs'

/** Folders of DATA_DIR that belong to the state of a site; the rest of it can be made again. */
const FOLDERS = ['uploads', 'attachments']
const FORMAT = 1

const query = async (url, text) => {
  const { default: pg } = await import('pg')
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try { return (await client.query(text)).rows }
  finally { await client.end() }
}

/**
 * Writes database and files into one tar archive. The database comes first: a row never names a file that is not there
 * yet, so that the files saved after it hold all that it names.
 */
export async function writeState({ url, dataDir, file, programs = postgresPrograms() }) {
  const target = resolve(process.env.INIT_CWD ?? process.cwd(), file)
  if (!existsSync(dirname(target))) throw new Stop(`The folder ${dirname(target)} does not exist.`)
  const work = mkdtempSync(join(dataDir, 'backup-'))
  try {
    await run(`${programs}/pg_dump`, ['--format=custom', '--compress=1', '--no-owner', '--no-privileges', '--file', join(work, 'database.dump'), url], { quiet: true, orStop: 'The database could not be saved; see above.' })
    const { version } = JSON.parse(readFileSync(`${root}/package.json`, 'utf8'))
    const migrations = (await query(url, 'select name from schema_migrations order by id')).map(row => row.name)
    writeFileSync(join(work, 'fettle.json'), JSON.stringify({ format: FORMAT, version, migrations, madeAt: new Date().toISOString() }))
    const folders = FOLDERS.filter(name => existsSync(join(dataDir, name)))
    // a name of its own until it is whole: a backup that was cut short must not look like one
    const whole = `${target}.partly`
    // accounts and plant data are for nobody else on this machine
    writeFileSync(whole, '', { mode: 0o600 })
    chmodSync(whole, 0o600)
    const { code, output } = await run('tar', ['-cf', whole, '-C', work, 'fettle.json', 'database.dump', ...(folders.length ? ['-C', dataDir, ...folders] : [])], { quiet: true })
    // 1: a file changed or went while it was read, as an upload under way does; its row says that it is not complete
    if (code > 1) {
      rmSync(whole, { force: true })
      throw new Stop(`The archive ${target} could not be written.\n${output}`)
    }
    renameSync(whole, target)
    return target
  }
  finally { rmSync(work, { recursive: true, force: true }) }
}

/** Puts a saved state in place of the one there; refuses when there is one and `replace` was not asked for. */
export async function readState({ url, dataDir, file, replace, programs = postgresPrograms() }) {
  const source = resolve(process.env.INIT_CWD ?? process.cwd(), file)
  if (!existsSync(source)) throw new Stop(`There is no file ${source}.`)
  const work = mkdtempSync(join(dataDir, 'restore-'))
  try {
    await run('tar', ['-xf', source, '-C', work], { quiet: true, orStop: `${source} is not a backup of Fettle, or it is damaged.` })
    if (!existsSync(join(work, 'fettle.json'))) throw new Stop(`${source} is not a backup of Fettle.`)
    const about = JSON.parse(readFileSync(join(work, 'fettle.json'), 'utf8'))
    if (about.format !== FORMAT) throw new Stop(`${source} was made by Fettle ${about.version} in a form that this version does not know. Use a newer version.`)
    const used = await query(url, 'select exists (select 1 from information_schema.tables where table_schema = \'public\') as used')
    const filesThere = FOLDERS.some(name => existsSync(join(dataDir, name)) && readdirSync(join(dataDir, name)).length)
    if ((used[0].used || filesThere) && !replace) throw new Stop('There is a site here already. Save it first if it matters, then say that it may be replaced: npm run restore -- FILE --replace')
    // all that may fail comes first, and the database changes in one transaction: there is the old site or the new one
    const text = join(work, 'database.sql')
    await run(`${programs}/pg_restore`, ['--no-owner', '--no-privileges', `--file=${text}`, join(work, 'database.dump')], { quiet: true, orStop: `The database in ${source} is damaged; nothing was changed.` })
    const empty = join(work, 'empty.sql')
    writeFileSync(empty, 'drop schema if exists public cascade; drop schema if exists pgboss cascade; create schema public;')
    for (const name of FOLDERS) {
      rmSync(join(dataDir, `${name}.new`), { recursive: true, force: true })
      mkdirSync(join(dataDir, `${name}.new`), { recursive: true, mode: 0o700 })
      if (existsSync(join(work, name))) cpSync(join(work, name), join(dataDir, `${name}.new`), { recursive: true, preserveTimestamps: true })
    }
    await run(`${programs}/psql`, ['--quiet', '--no-psqlrc', '--single-transaction', '--set=ON_ERROR_STOP=1', `--file=${empty}`, `--file=${text}`, url], { quiet: true, orStop: 'The database could not be restored; nothing was changed.' })
    for (const name of FOLDERS) {
      rmSync(join(dataDir, name), { recursive: true, force: true })
      renameSync(join(dataDir, `${name}.new`), join(dataDir, name))
    }
    return about
  }
  finally { rmSync(work, { recursive: true, force: true }) }
}
