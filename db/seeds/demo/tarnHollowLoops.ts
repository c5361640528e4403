/**
 * The loop list of Tarn Hollow Tileworks, an invented ceramic tile works: what each loop controls and over which range.
 * Tags follow the letters of ISA-5.1 (first letter the measured variable, I indicating, C controlling).
 */
import type { LoopType } from '../../../shared/assessment/types'

export interface DemoLine {
  tag: string
  description: string
  area: string
  unit: string
  type: LoopType
  low: number
  high: number
  pvUnit: string
  /** usual set point */
  at: number
  intervalS: number
  tolerance?: number
  direct?: boolean
  priority: 1 | 2 | 3
  /** factor on the usual process times of the type */
  slower?: number
}

const lines: DemoLine[] = []
let area = ''
let unit = ''
const types: Record<string, LoopType> = { T: 'temperature', F: 'flow', P: 'pressure', L: 'level', A: 'analysis' }
const intervals: Record<LoopType, number> = { temperature: 20, flow: 5, pressure: 5, level: 10, analysis: 30, other: 10 }

function loop(tag: string, description: string, low: number, high: number, pvUnit: string, at: number, more: Partial<DemoLine> = {}): void {
  const type = types[tag[0]]
  lines.push({ tag, description, area, unit, type, low, high, pvUnit, at, intervalS: intervals[type], priority: 2, ...more })
}

// Kilns: three roller kilns of fourteen zones, two shuttle kilns of four
area = 'Kilns'
for (let kiln = 1; kiln <= 3; kiln++) {
  unit = `Roller kiln ${kiln}`
  const zones = [380, 520, 640, 760, 870, 980, 1070, 1130, 1165, 1170, 1150, 940, 620, 420]
  const part = (zone: number) => zone <= 5 ? 'preheat' : zone <= 11 ? 'firing' : 'cooling'
  zones.forEach((at, i) => loop(`TIC-1${kiln}${String(i + 1).padStart(2, '0')}`, `Kiln ${kiln} zone ${i + 1} ${part(i + 1)} temperature`, 0, 1300, 'degC', at, { tolerance: 6, priority: i > 4 && i < 11 ? 3 : 2 }))
  loop(`PIC-1${kiln}20`, `Kiln ${kiln} gas manifold pressure`, 0, 250, 'mbar', 120, { priority: 3 })
  loop(`PIC-1${kiln}21`, `Kiln ${kiln} pressure at the preheat end`, -1, 1, 'mbar', -0.15, { direct: true })
  loop(`PDIC-1${kiln}22`, `Kiln ${kiln} combustion air filter to burner differential pressure`, 0, 60, 'mbar', 32)
  loop(`FIC-1${kiln}23`, `Kiln ${kiln} combustion air flow`, 0, 6000, 'm3/h', 3200, { priority: 3 })
  loop(`FIC-1${kiln}24`, `Kiln ${kiln} rapid cooling air flow`, 0, 4000, 'm3/h', 1900)
  loop(`AIC-1${kiln}25`, `Kiln ${kiln} flue oxygen`, 0, 21, '% O2', 8.5, { direct: true })
}
for (let kiln = 1; kiln <= 2; kiln++) {
  unit = `Shuttle kiln ${kiln}`
  for (let zone = 1; zone <= 4; zone++) loop(`TIC-1${3 + kiln}0${zone}`, `Shuttle kiln ${kiln} zone ${zone} temperature, batch firing`, 0, 1300, 'degC', 1120, { tolerance: 15, intervalS: 30 })
}

// Dryers
area = 'Dryers'
for (let dryer = 1; dryer <= 4; dryer++) {
  unit = `Tile dryer ${dryer}`
  loop(`TIC-2${dryer}01`, `Dryer ${dryer} inlet air temperature`, 0, 250, 'degC', 165, { priority: 3 })
  loop(`TIC-2${dryer}02`, `Dryer ${dryer} outlet air temperature`, 0, 200, 'degC', 92)
  loop(`AIC-2${dryer}03`, `Dryer ${dryer} exhaust humidity`, 0, 100, '% RH', 48, { direct: true })
  loop(`FIC-2${dryer}04`, `Dryer ${dryer} recirculated air flow`, 0, 9000, 'm3/h', 5200)
  loop(`PIC-2${dryer}05`, `Dryer ${dryer} chamber pressure`, -2, 2, 'mbar', 0.2, { direct: true })
}
unit = 'Spray dryer'
loop('TIC-251', 'Spray dryer outlet air temperature', 0, 200, 'degC', 98, { priority: 3 })
loop('FIC-252', 'Spray dryer gas flow, set by outlet temperature', 0, 400, 'm3/h', 200, { priority: 3 })
loop('TIC-253', 'Spray dryer inlet air temperature', 0, 700, 'degC', 520, { priority: 3 })
loop('PIC-254', 'Slip pump discharge pressure', 0, 40, 'bar', 24)
loop('FIC-255', 'Slip flow to nozzles', 0, 25, 'm3/h', 13)
loop('PIC-256', 'Spray dryer chamber pressure', -5, 5, 'mbar', -0.8, { direct: true })
loop('PDIC-257', 'Cyclone differential pressure', 0, 30, 'mbar', 14)
loop('AIC-258', 'Powder moisture', 0, 12, '%', 6.2, { direct: true, priority: 3 })
unit = 'Sample ovens'
for (let oven = 1; oven <= 4; oven++) loop(`TIC-26${oven}`, `Sample oven ${oven}, on-off heating`, 0, 300, 'degC', 110 + 15 * oven, { priority: 1, tolerance: 6 })

// Boiler house
area = 'Boiler house'
for (let boiler = 1; boiler <= 2; boiler++) {
  unit = `Boiler ${boiler}`
  loop(`LIC-3${boiler}1`, `Boiler ${boiler} drum level`, 0, 100, '%', 50, { priority: 3 })
  loop(`FIC-3${boiler}2`, `Boiler ${boiler} feed water flow${boiler === 2 ? ', set by drum level' : ''}`, 0, 20, 't/h', 9.5, { priority: 3, ...(boiler === 1 ? { slower: 3 } : {}) })
  loop(`PIC-3${boiler}3`, `Boiler ${boiler} steam pressure`, 0, 16, 'bar', 10, { priority: 3 })
  loop(`FIC-3${boiler}4`, `Boiler ${boiler} combustion air flow`, 0, 12000, 'm3/h', 6400)
  loop(`AIC-3${boiler}5`, `Boiler ${boiler} flue oxygen`, 0, 21, '% O2', 3.6, { direct: true, intervalS: 10, slower: 0.3 })
  loop(`PIC-3${boiler}6`, `Boiler ${boiler} furnace draught`, -5, 5, 'mbar', -1.2, { direct: true })
}
unit = 'Steam and feed water'
loop('PIC-331', 'Feed water header pressure', 0, 25, 'bar', 15.5, { priority: 3 })
loop('LIC-332', 'Deaerator level', 0, 100, '%', 60)
loop('PIC-333', 'Deaerator pressure', 0, 2, 'bar', 0.4)
loop('LIC-334', 'Condensate tank level', 0, 100, '%', 55, { direct: true })
loop('FIC-335', 'Make-up water flow', 0, 12, 't/h', 4.2)
loop('TIC-336', 'Feed water temperature after economiser', 0, 180, 'degC', 118, { slower: 0.3, intervalS: 10 })
loop('PIC-337', 'Steam let-down to dryers', 0, 10, 'bar', 5, { priority: 3 })
loop('TIC-338', 'Let-down steam temperature', 0, 300, 'degC', 170, { direct: true })
loop('PIC-339', 'Gas supply pressure, boiler house', 0, 500, 'mbar', 300)
loop('FIC-340', 'Continuous blowdown flow', 0, 2, 't/h', 0.7, { priority: 1 })
loop('AIC-341', 'Boiler water conductivity', 0, 6000, 'uS/cm', 2900, { direct: true })
loop('FIC-342', 'Steam flow to spray slip heater', 0, 3, 't/h', 1.3)

// Glaze preparation
area = 'Glaze preparation'
for (let line = 1; line <= 6; line++) {
  unit = `Glaze line ${line}`
  loop(`LIC-4${line}1`, `Glaze tank ${line} level`, 0, 100, '%', 60)
  loop(`AIC-4${line}2`, `Glaze ${line} density`, 1200, 2000, 'kg/m3', 1640, { direct: true })
  loop(`FIC-4${line}3`, `Glaze ${line} flow to the bell`, 0, 6, 'm3/h', 2.8, { priority: 3 })
  loop(`TIC-4${line}4`, `Glaze ${line} temperature`, 0, 60, 'degC', 31)
}
unit = 'Mills'
for (let mill = 1; mill <= 4; mill++) loop(`FIC-47${mill}`, `Mill ${mill} water dosing flow`, 0, 15, 'm3/h', 7.5)

// Presses
area = 'Presses'
for (let press = 1; press <= 6; press++) {
  unit = `Press ${press}`
  loop(`PIC-5${press}1`, `Press ${press} accumulator pressure`, 0, 350, 'bar', 230, { priority: 3 })
  loop(`TIC-5${press}2`, `Press ${press} hydraulic oil temperature`, 0, 90, 'degC', 46, { direct: true })
  loop(`TIC-5${press}3`, `Press ${press} die heating temperature`, 0, 150, 'degC', 68)
  loop(`LIC-5${press}4`, `Press ${press} powder hopper level`, 0, 100, '%', 65)
}
unit = 'Press cooling'
loop('TIC-571', 'Hydraulics cooling water supply temperature', 0, 60, 'degC', 27, { direct: true })
loop('FIC-572', 'Hydraulics cooling water flow', 0, 80, 'm3/h', 42)

// Compressed air
area = 'Compressed air'
for (let machine = 1; machine <= 3; machine++) {
  unit = `Compressor ${machine}`
  loop(`PIC-6${machine}1`, `Compressor ${machine} discharge pressure`, 0, 12, 'bar', 7.4)
  loop(`TIC-6${machine}2`, `Compressor ${machine} oil temperature`, 0, 120, 'degC', 78, { direct: true })
}
unit = 'Air network'
loop('PIC-641', 'Instrument air header pressure', 0, 10, 'bar', 6.8, { priority: 3 })
loop('PIC-642', 'Plant air header pressure', 0, 10, 'bar', 6.3)
loop('TIC-643', 'Air dryer 1 cooler outlet temperature', 0, 60, 'degC', 30, { direct: true })
loop('TIC-644', 'Air dryer 2 cooler outlet temperature', 0, 60, 'degC', 30, { direct: true })
loop('FIC-645', 'Cooling water flow to aftercoolers', 0, 30, 'm3/h', 16)
loop('FIC-646', 'Purge air flow of air dryer', 0, 200, 'm3/h', 90, { priority: 1 })

// Water
area = 'Water'
unit = 'Raw water'
loop('LIC-701', 'Raw water basin level', 0, 100, '%', 70)
loop('FIC-702', 'Raw water intake flow', 0, 150, 'm3/h', 80)
loop('PIC-703', 'Raw water header pressure', 0, 10, 'bar', 4.8)
loop('AIC-704', 'Filtered water pH', 0, 14, 'pH', 7.2)
loop('FIC-705', 'Softener feed flow', 0, 40, 'm3/h', 22)
loop('LIC-706', 'Softened water tank level', 0, 100, '%', 65)
unit = 'Cooling towers'
for (let tower = 1; tower <= 3; tower++) {
  loop(`TIC-7${tower}1`, `Tower ${tower} outlet temperature`, 0, 60, 'degC', 25, { direct: true })
  loop(`LIC-7${tower}2`, `Tower ${tower} basin level`, 0, 100, '%', 55)
  loop(`PIC-7${tower}3`, `Tower ${tower} pump discharge pressure`, 0, 8, 'bar', 4.2)
  loop(`FIC-7${tower}4`, `Tower ${tower} bleed flow`, 0, 12, 'm3/h', 4.5, { priority: 1 })
}
unit = 'Effluent'
loop('AIC-751', 'Neutralisation tank 1 pH', 0, 14, 'pH', 7.5, { priority: 3 })
loop('AIC-752', 'Neutralisation tank 2 pH', 0, 14, 'pH', 7.8, { priority: 3 })
loop('LIC-753', 'Effluent sump level', 0, 100, '%', 45, { direct: true })
loop('FIC-754', 'Effluent discharge flow', 0, 60, 'm3/h', 28)
loop('FIC-755', 'Settling tank return flow', 0, 40, 'm3/h', 18)
loop('PIC-756', 'Filter press feed pressure', 0, 16, 'bar', 8)

// Waste heat
area = 'Waste heat'
for (let unitNumber = 1; unitNumber <= 3; unitNumber++) {
  unit = `Recuperator ${unitNumber}`
  loop(`TIC-8${unitNumber}1`, `Recuperator ${unitNumber} hot air temperature`, 0, 400, 'degC', 235)
  loop(`FIC-8${unitNumber}2`, `Recuperator ${unitNumber} air flow${unitNumber < 3 ? ', set by hot air temperature' : ''}`, 0, 8000, 'm3/h', 4300, { direct: false })
  loop(`PIC-8${unitNumber}3`, `Recuperator ${unitNumber} flue draught`, -10, 2, 'mbar', -3.5, { direct: true })
  loop(`TIC-8${unitNumber}4`, `Recuperator ${unitNumber} flue temperature after unit`, 0, 350, 'degC', 180, { direct: true })
}
unit = 'Hot water'
for (let circuit = 1; circuit <= 3; circuit++) {
  loop(`TIC-84${circuit}`, `Hot water circuit ${circuit} supply temperature`, 0, 120, 'degC', 78)
  loop(`PDIC-85${circuit}`, `Hot water circuit ${circuit} differential pressure`, 0, 3, 'bar', 1.4)
  loop(`FIC-86${circuit}`, `Hot water circuit ${circuit} flow`, 0, 60, 'm3/h', 31)
}
loop('LIC-871', 'Hot water expansion vessel level', 0, 100, '%', 50)
loop('PIC-872', 'Hot water system pressure', 0, 6, 'bar', 2.8)

export const DEMO_LINES: readonly DemoLine[] = lines
