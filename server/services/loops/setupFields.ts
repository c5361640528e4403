/** Fields of a loop's set-up that make up its tuning, as the tuning record keeps them. */
export const TUNING_FIELDS = ['form', 'action', 'gain', 'gainUnit', 'integralTime', 'derivativeTime', 'timeUnit', 'filterTimeS', 'setpointWeight', 'hysteresis'] as const

/** These words enter no figure: a change of theirs asks for no new assessment. */
export const UNASSESSED_FIELDS: ReadonlySet<string> = new Set(['description', 'unit', 'pvUnit', 'upstream'])
