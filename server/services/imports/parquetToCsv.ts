import { UnreadableFile } from './scan/unreadableFile'

/** Turns a Parquet file into text beside it, by DuckDB with a bounded memory, so that one reader takes all. The caller deletes it. */
export async function parquetToCsv(path: string): Promise<string> {
  const { DuckDBInstance } = await import('@duckdb/node-api')
  const out = `${path}.csv`
  const instance = await DuckDBInstance.create(':memory:', { threads: '1', memory_limit: '512MB' })
  try {
    const connection = await instance.connect()
    const quote = (text: string) => `'${text.replaceAll(`'`, `''`)}'`
    // times with a zone are written with their offset from UTC
    await connection.run(`SET TimeZone = 'UTC'`)
    await connection.run(`SET preserve_insertion_order = true`)
    await connection.run(`COPY (SELECT * FROM read_parquet(${quote(path)})) TO ${quote(out)} (FORMAT csv, HEADER true)`)
    connection.closeSync()
    return out
  }
  catch (error) {
    throw new UnreadableFile(`The Parquet file cannot be read: ${(error as Error).message.split('\n')[0].replaceAll(path, 'the file').slice(0, 200)}`)
  }
  finally { instance.closeSync() }
}
