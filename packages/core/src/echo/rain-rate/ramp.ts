/**
 * 0 up to `from`, 1 from `to` on, and between them 3 t² − 2 t³, which has no step and no kink.
 *
 * @returns 0 for NaN
 */
export function ramp(value: number, from: number, to: number): number {
  if (!(value > from)) return 0;
  if (value >= to) return 1;
  const t = (value - from) / (to - from);
  return t * t * (3 - 2 * t);
}
