import type { Verdict } from '../assessment/types'

export type CheckField =
  | { key: string, label: string, kind: 'choice', choices: string[] }
  | { key: string, label: string, kind: 'number', unit: string, step: number }
  | { key: string, label: string, kind: 'text' }

export interface FieldCheck {
  id: string
  title: string
  /** what to do, as one would say it to a colleague */
  how: string
  fields: CheckField[]
  /** an answer is asked for before handing back; at most six over the list */
  required: boolean
  caution?: string
}

const yesNo = (key: string, label: string): CheckField => ({ key, label, kind: 'choice', choices: ['yes', 'no', 'not seen'] })
const percent = (key: string, label: string): CheckField => ({ key, label, kind: 'number', unit: '%', step: 0.1 })

const operator: FieldCheck = {
  id: 'operator', title: 'Ask the operator', required: true,
  how: 'Before touching anything: is the loop known to misbehave, when, and what is done about it? Agree when a test may be made.',
  fields: [{ key: 'said', label: 'What the operator said', kind: 'text' }],
}
const modeAndSetpoint: FieldCheck = {
  id: 'mode', title: 'Mode and set point', required: true,
  how: 'Note the mode and the set point as found. Is the loop in the mode it is meant to be in?',
  fields: [{ key: 'mode', label: 'Mode as found', kind: 'text' }, yesNo('normal', 'In its normal mode')],
}
const sensor: FieldCheck = {
  id: 'sensor', title: 'Sensor', required: false,
  how: 'Compare the reading with a local gauge or a second instrument. Look at the connection, the impulse line or the well.',
  fields: [yesNo('agrees', 'Agrees with a second reading'), { key: 'remark', label: 'What was seen', kind: 'text' }],
}
const smallSteps: FieldCheck = {
  id: 'valveSteps', title: 'Valve: small steps in manual', required: true,
  how: 'With the operator: loop to manual, raise the output in steps of 0.5 % until the process variable answers, go on for two steps, then lower it in the same steps until it answers again. Return to the output as found.',
  caution: 'Only with the operator’s word and the permit that your site asks for. Small steps. Stop at the first sign of trouble and return to the output as found.',
  fields: [percent('step', 'Step size'), percent('firstAnswerUp', 'Output at the first answer, going up'), percent('highest', 'Highest output'), percent('firstAnswerDown', 'Output at the first answer, going down')],
}
const positioner: FieldCheck = {
  id: 'positioner', title: 'Positioner and air supply', required: false,
  how: 'Read the supply gauge, listen for leaks, look at the linkage and at the positioner’s own travel reading.',
  fields: [{ key: 'supply', label: 'Air supply', kind: 'number', unit: 'bar', step: 0.1 }, yesNo('linkage', 'Linkage free of play')],
}
const packing: FieldCheck = {
  id: 'packing', title: 'Packing', required: false,
  how: 'Look for a packing nut that was overtightened and for marks on the stem.',
  fields: [yesNo('sound', 'Packing and stem in order'), { key: 'remark', label: 'What was seen', kind: 'text' }],
}
const limits: FieldCheck = {
  id: 'limits', title: 'Where the output stands against its limit', required: true,
  how: 'Note the output and whether the valve really is at its stop. Is a bypass open, a hand valve shut, the supply too weak?',
  fields: [percent('output', 'Output as found'), yesNo('atStop', 'Valve at its stop'), { key: 'remark', label: 'Bypass, hand valves, supply', kind: 'text' }],
}
const disturbance: FieldCheck = {
  id: 'disturbance', title: 'Where the upset comes from', required: false,
  how: 'Look upstream: which pump, valve or batch works in the same rhythm?',
  fields: [{ key: 'seen', label: 'What works in the same rhythm', kind: 'text' }],
}
const leftAs: FieldCheck = {
  id: 'asLeft', title: 'As left', required: true,
  how: 'What was changed, and how the loop was left: mode, set point, output, who was told.',
  fields: [{ key: 'change', label: 'What was done', kind: 'text' }, { key: 'mode', label: 'Mode as left', kind: 'text' }],
}

const byVerdict: Record<Verdict, FieldCheck[]> = {
  huntingValve: [operator, modeAndSetpoint, smallSteps, positioner, packing, leftAs],
  huntingTuning: [operator, modeAndSetpoint, smallSteps, leftAs],
  huntingExternal: [operator, modeAndSetpoint, disturbance, smallSteps, leftAs],
  sluggish: [operator, modeAndSetpoint, sensor, smallSteps, leftAs],
  saturated: [operator, modeAndSetpoint, limits, positioner, leftAs],
  manual: [operator, modeAndSetpoint, sensor, leftAs],
  sensor: [operator, modeAndSetpoint, { ...sensor, required: true }, leftAs],
  noise: [operator, modeAndSetpoint, { ...sensor, required: true }, leftAs],
  steady: [operator, modeAndSetpoint, leftAs],
  cannotTell: [operator, modeAndSetpoint, sensor, smallSteps, leftAs],
}

/** The checks in the field that settle a verdict, in the order in which they are done. */
export const fieldChecks = (verdict: Verdict): FieldCheck[] => byVerdict[verdict]

/** Reminders that stand above every list of checks. */
export const FIELD_CAUTIONS = [
  'Follow the site’s permit to work and management of change. Tell the operator before any test.',
  'Safety instrumented functions, interlocks and protective trips are out of scope: do not bypass or test them from here.',
  'Local codes, the equipment maker’s limits and the judgement of qualified persons come first.',
]
