import type { ProcessModel, RuleResult } from '../types'
import { amigo } from './amigo'
import { chienHronesReswick } from './chienHronesReswick'
import { cohenCoon } from './cohenCoon'
import { imc } from './imc'
import { lambda } from './lambda'
import { simc } from './simc'
import { speedSlider } from './speedSlider'
import { tyreusLuyben } from './tyreusLuyben'
import { zieglerNichols } from './zieglerNichols'

/**
 * Every rule's answer for a model, the recommended one (SIMC at the slider's speed) first, those for comparison last.
 * @param position of the speed slider, 0 robust .. 1 fast
 * @throws RangeError as the rules
 */
export function allTunings(model: ProcessModel, position: number): RuleResult[] {
  const closedLoopTime = speedSlider(model, position)
  return [
    simc(model, { terms: 'PI', closedLoopTime }),
    ...(model.kind === 'sopdt' ? [simc(model, { terms: 'PID', closedLoopTime })] : []),
    lambda(model, { closedLoopTime }),
    imc(model, { variant: 'pi' }), imc(model, { variant: 'improvedPi' }), imc(model, { variant: 'pid' }),
    amigo(model, { terms: 'PI' }), amigo(model, { terms: 'PID' }),
    tyreusLuyben(model, { terms: 'PI' }), tyreusLuyben(model, { terms: 'PID' }),
    chienHronesReswick(model, { aim: 'load', terms: 'PI' }), chienHronesReswick(model, { aim: 'setpoint', terms: 'PI' }),
    zieglerNichols(model, { method: 'closedLoop', terms: 'PI' }), zieglerNichols(model, { method: 'closedLoop', terms: 'PID' }),
    zieglerNichols(model, { method: 'openLoop', terms: 'PI' }),
    cohenCoon(model, { terms: 'PI' }), cohenCoon(model, { terms: 'PID' }),
  ]
}
