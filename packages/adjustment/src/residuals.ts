/** A mismatch G = (1 + relative) R + absolute of gauge and radar. */
export interface SplitMismatch {
  readonly relative: number;
  /** mm */
  readonly absolute: number;
}

/**
 * Splits the mismatch of gauge and radar into a relative and an absolute part, of least
 * relative² + (absolute/s)²: relative = e R/(R² + s²), absolute = e s²/(R² + s²), e = G - R.
 * Where radar saw little it is an absolute matter, where it saw much a relative one. House rule after the
 * additive-multiplicative error model of the trade.
 *
 * @param turnMm - s, the radar depth at which the one turns into the other, above 0
 */
export function splitMismatch(gaugeMm: number, radarMm: number, turnMm: number): SplitMismatch {
  const error = gaugeMm - radarMm;
  const size = radarMm * radarMm + turnMm * turnMm;
  return { relative: (error * radarMm) / size, absolute: (error * turnMm * turnMm) / size };
}
