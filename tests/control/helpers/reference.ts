import { readFileSync } from 'node:fs'
import type { IdealPid, ProcessModel } from '../../../shared/control/types'

export interface ReferenceCase { id: string, inputs: any, expected: any, tolerance: any, source: string }

export function referenceCases(name: 'tuning' | 'onOff' | 'twoDegreeOfFreedom'): ReferenceCase[] {
  return JSON.parse(readFileSync(new URL(`../../../fixtures/reference/${name}.json`, import.meta.url), 'utf8')).cases
}

/** A process of the reference table in the project's own shape. */
export function processModel(p: { type: string, K: number, tau?: number, tau2?: number, theta: number }): ProcessModel {
  const common = { processGain: p.K, deadTime: p.theta }
  if (p.type === 'INT') return { kind: 'integrating', ...common }
  if (p.type === 'SOPDT') return { kind: 'sopdt', ...common, timeConstant: p.tau!, timeConstant2: p.tau2! }
  return { kind: 'fopdt', ...common, timeConstant: p.tau! }
}

export function idealPid(e: { Kc: number, Ti: number | null, Td?: number | null }): IdealPid {
  return { controllerGain: e.Kc, integralTime: e.Ti ?? Infinity, derivativeTime: e.Td ?? 0 }
}

export const relative = (value: number, expected: number) => Math.abs(value - expected) / Math.max(1e-12, Math.abs(expected))
