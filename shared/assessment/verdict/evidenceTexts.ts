/** How each figure is told to a person: what was looked at, where it comes from, one plain sentence. */
import type { FeatureName } from './gatherFeatures'

interface EvidenceText { measure: string, source: string, text: (x: number) => string }

const ours = 'Ours, see the methods'
const runs = 'After He and others 2007; Srinivasan and others 2005'
const slips = 'Ours, after Choudhury, Thornhill, Shah 2005'
const withMinus = (x: number) => x.toString().replace('-', '−')
const times = (x: number, digits = 2) => withMinus(Number(x.toPrecision(digits)))
const percent = (x: number) => `${withMinus(Math.round(100 * x))} %`

export const EVIDENCE_TEXTS: Readonly<Record<FeatureName, EvidenceText>> = {
  huntingShare: { measure: 'Time oscillating', source: 'Thornhill, Huang, Zhang 2003', text: x => x > 0 ? `It oscillates in ${percent(Math.min(1, x))} of the usable time.` : 'No regular oscillation was found.' },
  regularity: { measure: 'Regularity', source: 'Thornhill, Huang, Zhang 2003', text: x => `The oscillation's regularity is ${times(10 ** x)}; above 1 is regular.` },
  strength: { measure: 'Strength of the oscillation', source: 'Definition', text: x => `The oscillation makes ${percent(x)} of the error's variance.` },
  amplitudeOverTolerance: { measure: 'Size of the oscillation', source: 'Definition', text: x => `The swing is ${times(x)} times the tolerance.` },
  amplitudeVariation: { measure: 'Steadiness of the amplitude', source: 'Ours; noise through a resonance gives 52 %', text: x => `The amplitude varies by ${percent(x)} from cycle to cycle.` },
  periodVariation: { measure: 'Steadiness of the period', source: ours, text: x => `The period varies by ${percent(x)} from cycle to cycle.` },
  phaseWander: { measure: 'Beat over many cycles', source: ours, text: x => `Over 20 cycles the beat strays by ${percent(x)} of a period.` },
  pvThird: { measure: 'Wave form of PV', source: 'Fourier series: square +33 %, triangle −11 %', text: x => `PV's third harmonic, in step, is ${percent(x)} of the first: ${x > 0.08 ? 'square-like' : x < -0.04 ? 'triangle-like' : 'near a sine'}.` },
  opThird: { measure: 'Wave form of OP', source: 'Fourier series: square +33 %, triangle −11 %', text: x => `OP's third harmonic, in step, is ${percent(x)} of the first: ${x > 0.08 ? 'square-like' : x < -0.04 ? 'triangle-like' : 'near a sine'}.` },
  pvOdd: { measure: 'Odd harmonics of PV', source: 'Fourier series', text: x => `Odd harmonics of PV are ${percent(x)} of the swing.` },
  pvEven: { measure: 'Even harmonics of PV', source: 'Fourier series', text: x => `Even harmonics of PV are ${percent(x)} of the swing.` },
  pvCoherence: { measure: 'Likeness of the cycles', source: ours, text: x => `The mean cycle explains ${percent(x)} of PV's movement within the cycles.` },
  halfLengthVariation: { measure: 'Evenness of the half-cycles', source: ours, text: x => `The lengths of the large half-cycles vary by ${percent(x)}.` },
  halfPeakVariation: { measure: 'Evenness of the peaks', source: ours, text: x => `The peaks of the large half-cycles vary by ${percent(x)}.` },
  halfRunShare: { measure: 'Runs of like half-cycles', source: ours, text: x => `${percent(Math.min(1, x))} of the large half-cycles lie in runs of like ones.` },
  periodOverIntegralTime: { measure: 'Period against integral time', source: ours, text: x => `The period is ${times(Math.exp(x))} times the integral time.` },
  periodOverDeadTime: { measure: 'Period against dead time', source: ours, text: x => `The period is ${times(Math.exp(x))} times the dead time.` },
  setpointSwing: { measure: 'Rhythm in the set point', source: ours, text: x => x > 0.05 ? `The set point swings at the same period, ${percent(x)} of PV's swing.` : 'The set point does not swing at this period.' },
  manualSwing: { measure: 'Swing in manual', source: 'Common practice, no source', text: x => x > 0.5 ? `In manual the swing went on, ${percent(x)} as large.` : `In manual only ${percent(x)} of the swing was left.` },
  stickExplained: { measure: 'Fit of a sticking stem', source: 'After Srinivasan and others 2005; He and others 2007', text: x => `A sticking stem explains ${percent(x)} of PV's movement.` },
  stickGain: { measure: 'Sticking against sound stem', source: 'After Srinivasan and others 2005; He and others 2007', text: x => x > 0 ? `A sticking stem explains ${percent(x)} more of PV than a sound one.` : 'A sticking stem explains PV no better than a sound one.' },
  stickRest: { measure: 'Rest of the fitted stem', source: ours, text: x => `The best fitting stem rests ${percent(x)} of the time.` },
  slipShare: { measure: 'Slips', source: 'Ours, after Choudhury, Thornhill, Shah 2005', text: x => `${percent(x)} of the long half-cycles end in a jump of PV across the set point that the output had asked for.` },
  slipCount: { measure: 'Number of slips', source: 'Ours, after Choudhury, Thornhill, Shah 2005', text: x => x > 0 ? `PV stood, then jumped as the output had long asked, ${x} times.` : 'PV never stood and then jumped as the output asked.' },
  standingTravel: { measure: 'Output travel while PV stands', source: 'Ours, after Choudhury, Thornhill, Shah 2005', text: x => `${percent(x)} of the output's travel is made while PV stands.` },
  jumpShare: { measure: 'Jumps of PV', source: 'Ours, after Choudhury, Thornhill, Shah 2005', text: x => `${percent(x)} of PV's travel is made in its fastest fifth; even movement gives 31 %.` },
  halfCycleShape: { measure: 'Shape of the half-cycles', source: 'He, Wang, Pottmann, Qin 2007', text: x => `The half-cycle shape index is ${times(x)}: ${x >= 0.6 ? 'triangular' : x <= 0.4 ? 'sine' : 'between sine and triangle'}.` },
  peakAsymmetry: { measure: 'Asymmetry of the peaks', source: 'Singhal, Salsbury 2005', text: x => `The area before the peak is ${times(x)} times the area after it.` },
  stickSlip: { measure: 'Stick-slip patterns', source: 'Yamashita 2006, with equiprobable symbols', text: x => `In ${percent(x)} of the moves OP moves while PV stands; chance gives 25 %.` },
  lagAsymmetry: { measure: 'Cross-correlation of OP and PV', source: 'Horch 1999', text: x => `The asymmetry of the zero crossings is ${times(x)}; odd from 0.67, even below 0.33.` },
  errorDecayOverSettling: { measure: 'Memory of the error', source: 'Definition (correlation time)', text: x => `The error fades over ${times(10 ** x)} settling horizons.` },
  staySideOverSettling: { measure: 'Stay on one side', source: ours, text: x => `The error stays on one side for ${times(10 ** x)} settling horizons on average.` },
  slowShare: { measure: 'Slow recoveries', source: 'Ours; common practice', text: x => `${percent(x)} of the upsets were worked off without a swing, but too slowly.` },
  recoveryOverSettling: { measure: 'Recovery time', source: 'Common practice, no source', text: x => `An upset is worked off in ${times(x)} settling horizons.` },
  swingBack: { measure: 'Swing back after upsets', source: ours, text: x => `After an upset the error swings back by ${percent(x)} of its peak.` },
  idleIndex: { measure: 'Idle index', source: 'Hägglund 1999, cut at 5 % of the peak', text: x => `The idle index of the recoveries is ${times(x)}; near 1 is sluggish.` },
  whiteness: { measure: 'Likeness of the error to noise', source: 'Definition (1 − lag-1 autocorrelation)', text: x => `1 less the lag-1 autocorrelation is ${times(x)}; noise alone gives 1.` },
  kurtosis: { measure: 'Distribution of the error', source: 'Definition (kurtosis: sine 1.5, normal 3)', text: x => `The error's kurtosis is ${times(x)}: ${x < 2.3 ? 'a steady swing' : x < 4 ? 'near normal' : 'rare large upsets'}.` },
  deviationOverTolerance: { measure: 'Size of the error', source: 'Definition', text: x => `The error's standard deviation is ${times(x)} times the tolerance.` },
  noiseOverTolerance: { measure: 'Size of the noise', source: ours, text: x => `The noise of PV is ${times(x)} times the tolerance.` },
  noiseShare: { measure: 'Share of noise', source: ours, text: x => `Noise makes ${percent(x)} of the error's variance.` },
  burstRatio: { measure: 'Bursts of noise', source: ours, text: x => `The loudest hours are ${times(10 ** x)} times as noisy as the quiet ones.` },
  wildShare: { measure: 'Wild readings', source: ours, text: x => x > 0 ? `${times(100 * x)} % of the readings stand alone, far off their neighbours.` : 'No reading stands alone, far off its neighbours.' },
  offTargetShare: { measure: 'Hours off target', source: 'Week ledger', text: x => `${percent(x)} of the judged hours are off target.` },
  jumpSlips: { measure: 'Strokes of a sticking valve', source: slips, text: x => `PV stood while OP moved on, then jumped the way OP had asked: ${times(x)} times.` },
  jumpSlipShare: { measure: 'Share of the jumps', source: slips, text: x => `${percent(x)} of PV's jumps came after such a stand.` },
  jumpTravel: { measure: 'Travel before the jump', source: slips, text: x => `Before it jumped, OP had travelled ${times(x)} times as far, in shares of their spans.` },
  jumpFollow: { measure: 'PV during the stand', source: slips, text: x => x > 0 ? `While OP moved on, PV had gone ${percent(x)} of the way.` : 'While OP moved on, PV did not follow.' },
  jumpStandGain: { measure: 'Gain during the stand', source: slips, text: x => `While OP moved on, PV answered with a gain of ${times(x)}; a stem that stands gives 0.` },
  jumpOffset: { measure: 'Offset before the jump', source: slips, text: x => `PV stood ${times(x)} jumps off its set point.` },
  jumpSize: { measure: 'Size of the jumps', source: slips, text: x => `The jumps are ${times(x)} times what stands out of noise and upsets.` },
  bendSlips: { measure: 'Strokes of a sticking valve', source: slips, text: x => `PV ran on straight while OP moved on, then bent the way OP had asked: ${times(x)} times.` },
  bendSlipShare: { measure: 'Share of the bends', source: slips, text: x => `${percent(x)} of PV's bends came after such a run.` },
  bendFollow: { measure: 'PV during the run', source: slips, text: x => x > 0 ? `While OP moved on, PV's slope had gone ${percent(x)} of the way.` : 'While OP moved on, PV ran on straight.' },
  bendOffset: { measure: 'Offset before the bend', source: slips, text: x => `PV was ${times(x)} times its usual error off the set point.` },
  bendSize: { measure: 'Size of the bends', source: slips, text: x => `The bends are ${times(x)} times what stands out of noise and upsets.` },
  runGain: { measure: 'Straight runs', source: runs, text: x => `A sticking stem leaves ${percent(Math.exp(-x))} of the level's movement that a sound one leaves unexplained.` },
  runExplained: { measure: 'Fit of straight runs', source: runs, text: x => `A sticking stem explains ${percent(x)} of the level's movement.` },
}
