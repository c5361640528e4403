/**
 * For each figure of a loop-week: the method in a sentence and its source. The assessment adds window, samples,
 * parameters and intermediates, so that the number can be repeated by hand.
 */
import type { MeasureKey } from '../types'

const definition = 'Definition'
const practice = 'Common practice, no source'

export const MEASURE_TEXTS: Readonly<Record<MeasureKey, { method: string, source: string }>> = {
  coverage: { method: 'Usable PV samples x native interval, divided by the length of the week. Frozen samples count; missing and out-of-range ones do not.', source: definition },
  serviceFactor: { method: 'Time in a normal mode divided by time with a known mode.', source: 'Definition (service factor)' },
  saturationFraction: { method: 'Share of time with OP within 0.5 % of span of a limit, for 3 samples or more at a stretch.', source: definition },
  saturationLowFraction: { method: 'Share of time with OP at its low limit, counted as for saturation.', source: definition },
  saturationHighFraction: { method: 'Share of time with OP at its high limit, counted as for saturation.', source: definition },
  iaePerHour: { method: 'Time-weighted mean of |SP - PV| in normal mode, that is the integral of the absolute error in unit x hours, per hour.', source: 'Definition (integrated absolute error)' },
  iaePercentSpan: { method: 'IAE per hour divided by the PV span, in per cent.', source: definition },
  offset: { method: 'Time-weighted mean of SP - PV in normal mode.', source: definition },
  standardDeviation: { method: 'Standard deviation of PV about its own mean in normal mode, divisor N.', source: definition },
  timeInTolerance: { method: 'Share of the usable time with |SP - PV| within the tolerance.', source: definition },
  oscillationIndex: { method: 'Regularity r of the zero crossings of the autocorrelation, within the band of the strongest spectral peak; above 1 the loop oscillates.', source: 'Thornhill, Huang, Zhang 2003, Detection of multiple oscillations in control loops' },
  oscillationPeriod: { method: 'Mean interval between zero crossings of the autocorrelation in the band, times two.', source: 'Thornhill, Huang, Zhang 2003, Detection of multiple oscillations in control loops' },
  oscillationAmplitude: { method: 'Half the peak-to-peak swing of the oscillation over the time it lasts.', source: definition },
  oscillationStrength: { method: 'Share of the variance of the control error that lies in the band of the strongest oscillation, over the time it lasts.', source: definition },
  oscillationShare: { method: 'Time inside detected oscillations divided by the usable time.', source: 'Definition; when it hunts by load counting, Hägglund 1995, A control-loop performance monitor' },
  varianceRatio: { method: 'Minimum variance divided by variance of the control error, from an autoregressive model; 1 is minimum variance.', source: 'Harris 1989, Assessment of control loop performance; Desborough, Harris 1992 (their own index is 1 - ratio)' },
  varianceRatioLow: { method: 'Lower end of the 95 % interval of the variance ratio, asymptotic variance.', source: 'Desborough, Harris 1992, Performance assessment measures for univariate feedback control' },
  varianceRatioHigh: { method: 'Upper end of the 95 % interval of the variance ratio, asymptotic variance.', source: 'Desborough, Harris 1992, Performance assessment measures for univariate feedback control' },
  headroom: { method: '1 - variance ratio: the share of the variance that control could remove at best.', source: 'Harris 1989, Assessment of control loop performance' },
  valveTravelPerDay: { method: 'Sum of |change of OP| in per cent of span, per day.', source: definition },
  reversalsPerDay: { method: 'Turns of OP larger than the noise band on both sides, per day. Noise band: the larger of 0.2 % of span and 6 standard deviations (+-3) of OP noise.', source: 'Definition; the noise band is our default' },
  compressionFactor: { method: 'N / (N - n), n the zero second differences within two quanta.', source: 'Thornhill, Choudhury, Shah 2004, The impact of compression on data-driven process analyses' },
  quantisation: { method: 'Smallest step of PV found in the record.', source: 'Thornhill, Choudhury, Shah 2004, The impact of compression on data-driven process analyses' },
  frozenFraction: { method: 'Share of the received time with an unchanged PV while OP moves more than 2 % or SP moves, longer than the settling horizon.', source: practice },
  outOfRangeFraction: { method: 'Share of the received time with PV more than 5 % of span outside its range.', source: practice },
  idleIndex: { method: 'Share of time in which PV and OP move the same way minus the share in which they move opposite, in recoveries after load steps, above 5 % of the peak.', source: 'Hägglund 1999, Automatic detection of sluggish control loops' },
  areaIndex: { method: 'Largest inner area between OP and its final value after a load step, divided by the sum.', source: 'Visioli 2005, Method for proportional-integral controller tuning assessment' },
  setpointMoves: { method: 'Steps of SP larger than 3 x noise, quiet before and long enough after.', source: practice },
  overshoot: { method: 'Median over the set-point responses of the peak beyond the new set point, divided by the step.', source: definition },
  riseTimeS: { method: 'Median over the set-point responses of the time from 10 to 90 % of the step.', source: definition },
  settlingTimeS: { method: 'Median over the set-point responses of the time until PV stays within 2 % of the step.', source: definition },
  decayRatio: { method: 'Median over the set-point responses of second peak over first peak.', source: definition },
  onOffPeriodS: { method: 'Median time between two switchings on of the on-off output.', source: definition },
  onOffSwing: { method: 'Median peak-to-peak swing of PV over a switching cycle.', source: definition },
  onOffDuty: { method: 'Time switched on divided by time.', source: definition },
  switchingsPerDay: { method: 'Changes of the output of more than half its span, per day.', source: definition },
  apparentStiction: { method: 'Width of the PV-OP ellipse at the mean PV during the oscillation, in per cent of OP span.', source: 'Choudhury, Jain, Shah 2008, Stiction: definition, modelling, detection and quantification' },
  apparentStictionLow: { method: 'Lower end of the interval of apparent stiction over the cycles.', source: 'Choudhury, Jain, Shah 2008, Stiction: definition, modelling, detection and quantification' },
  apparentStictionHigh: { method: 'Upper end of the interval of apparent stiction over the cycles.', source: 'Choudhury, Jain, Shah 2008, Stiction: definition, modelling, detection and quantification' },
}
