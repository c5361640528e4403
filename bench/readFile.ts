import { createReadStream } from 'node:fs'
import { parse } from 'csv-parse'
import { LongScanner } from '../server/services/imports/scan/longScanner'
import { LongSink } from '../server/services/imports/scan/longSink'
import { ModeNames } from '../server/services/imports/scan/modeNames'
import { recognise } from '../server/services/imports/scan/recognise'
import { ScanLog } from '../server/services/imports/scan/scanLog'
import { splitSignalName } from '../server/services/imports/scan/signalNames'
import { decoderOf, openTextFile, readRegions } from '../server/services/imports/scan/textFile'
import { TimeReader } from '../server/services/imports/scan/timeReader'
import { IGNORE, WideScanner } from '../server/services/imports/scan/wideScanner'
import { WideSink } from '../server/services/imports/scan/wideSink'

/**
 * One reading in a fresh process (cold): `ours` scans the file into columns, `library` is csv-parse with Number() into
 * columns. Prints milliseconds and a sum of all values, which has to be the same for both.
 */
const [reader, path] = process.argv.slice(2)
const started = performance.now()
let sum = 0
if (reader === 'ours') {
  const file = await openTextFile(path)
  const form = await recognise(file)
  const log = new ScanLog()
  const modes = new ModeNames()
  const times = new TimeReader(form.time!, 'UTC')
  const decode = decoderOf(file.encoding)
  let scanner: WideScanner | LongScanner
  let sink: { flush(): void }
  if (form.layout === 'wide') {
    let values = 0
    let modeColumns = 0
    const targets = Int32Array.from(form.signals, (s, i) => i === form.timeColumn || !s ? IGNORE : s.signal === 'mode' ? -2 - modeColumns++ : values++)
    const wide = sink = new WideSink(values, modeColumns, 64 << 20, (s) => {
      for (let c = 0; c < s.valueColumns; c++) for (let i = c * s.capacity; i < c * s.capacity + s.rows; i++) sum += s.values[i]
    })
    scanner = new WideScanner({ ...form, targets, decode }, wide, times, modes, log, 1)
  }
  else {
    const numeric: boolean[] = []
    const long = sink = new LongSink((s) => {
      for (let i = 0; i < s.rows; i++) if (numeric[s.series[i]]) sum += s.value[i]
    })
    scanner = new LongScanner({ ...form, decode }, long, times, modes, log, 1, (name, id) => {
      numeric[id] = splitSignalName(name)!.signal !== 'mode'
      return numeric[id] ? 'value' : 'mode'
    })
  }
  let skip = form.headerLine
  await readRegions(file, (bytes, from, to, last) => {
    while (skip > 0) if (bytes[from++] === 10) skip--
    return scanner.scan(bytes, from, to, last)
  })
  sink.flush()
}
else {
  let header: string[] | null = null
  let columns: number[][] = []
  for await (const record of createReadStream(path).pipe(parse({ delimiter: ',' })) as AsyncIterable<string[]>) {
    if (!header) {
      header = record
      columns = header.map(() => [])
      continue
    }
    Date.parse(record[0])
    if (header[1] === 'tag') {
      if (!record[1].endsWith('MODE')) {
        const v = Number(record[2])
        columns[2].push(v)
        sum += v
      }
    }
    else {
      for (let i = 1; i < record.length; i++) {
        if (header[i].endsWith('MODE')) continue
        const v = Number(record[i])
        columns[i].push(v)
        sum += v
      }
    }
  }
}
console.log(JSON.stringify({ ms: performance.now() - started, sum: Math.round(sum) }))
