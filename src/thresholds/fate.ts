/** Why a unit is set aside, as one small number per unit. */

/** In order of precedence: a unit counts once, under the first reason that holds. */
export const FATE = {
  placed: 0,
  scoreMissing: 1,
  scoreNotFinite: 2,
  cutoffMissing: 3,
  cutoffNotFinite: 4,
  scheduleKeyMissing: 5,
  notInSchedule: 6,
  comparedValueMissing: 7,
  noSpread: 8,
} as const

const REASONS = [
  'placed',
  'score missing',
  'score not finite',
  'cutoff missing',
  'cutoff not finite',
  'schedule key missing',
  'no cutoff in the schedule',
  'compare_by value missing',
  'no spread of the score',
] as const

/** Units set aside, by reason, in order of precedence; reasons that never hold are left out. */
export function countSetAside(fate: Uint8Array): Map<string, number> {
  const counts = new Float64Array(REASONS.length)
  for (let i = 0; i < fate.length; i++) counts[fate[i]]++
  const setAside = new Map<string, number>()
  for (let reason = 1; reason < REASONS.length; reason++) {
    if (counts[reason] > 0) setAside.set(REASONS[reason], counts[reason])
  }
  return setAside
}
