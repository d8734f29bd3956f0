/** A factor gauge/radar as a polynomial in range: log10 = a r² + b r + c. */
export interface RangePolynomial {
  /** Of r², r and 1; r in km. */
  readonly coefficients: readonly [a: number, b: number, c: number];
  /** Standard deviation of what the fit leaves, log10. */
  readonly residualSd: number;
  /** Nearest and farthest range that shaped it, km. */
  readonly fromKm: number;
  readonly toKm: number;
}

/**
 * Least-squares polynomial of log10(gauge/radar) on range, after Michelson & Koistinen (2000), Physics and
 * Chemistry of the Earth B 25, 883-887, and Gabella, Joss & Perona (2000).
 *
 * @param rangeKm - shape [n], n ≥ 4
 * @returns undefined where fewer than three ranges differ: nothing to fit
 */
export function rangePolynomial(
  rangeKm: ArrayLike<number>,
  log10Factor: ArrayLike<number>,
): RangePolynomial | undefined {
  const n = rangeKm.length;
  if (n < 4 || new Set(Array.from(rangeKm)).size < 3) return undefined;
  const ranges = Array.from(rangeKm);
  const mean = ranges.reduce((sum, range) => sum + range, 0) / n;
  const scale = Math.sqrt(ranges.reduce((sum, range) => sum + (range - mean) ** 2, 0) / n);
  // Orthogonal polynomials of the centred and scaled range: no near-singular normal equations.
  const u = ranges.map((range) => (range - mean) / scale);
  const cube = u.reduce((sum, t) => sum + t ** 3, 0) / n;
  const q = u.map((t) => t * t - cube * t - 1);
  const project = (basis: readonly number[]) => {
    const norm = basis.reduce((sum, value) => sum + value * value, 0);
    return norm > 1e-9 ? basis.reduce((sum, value, i) => sum + value * log10Factor[i], 0) / norm : 0;
  };
  const p0 = project(u.map(() => 1));
  const p1 = project(u);
  const p2 = project(q);
  const squares = u.reduce((sum, t, i) => sum + (log10Factor[i] - p0 - p1 * t - p2 * q[i]) ** 2, 0);
  const a = p2 / (scale * scale);
  const slope = (p1 - p2 * cube) / scale;
  return {
    coefficients: [a, slope - 2 * a * mean, p0 - p2 - slope * mean + a * mean * mean],
    residualSd: Math.sqrt(squares / (n - 3)),
    fromKm: Math.min(...ranges),
    toKm: Math.max(...ranges),
  };
}

/** The factor at a range; nearer or farther than any gauge it is held, never extrapolated. */
export function rangeFactor({ coefficients, fromKm, toKm }: RangePolynomial, rangeKm: number): number {
  const [a, b, c] = coefficients;
  const held = Math.min(toKm, Math.max(fromKm, rangeKm));
  return 10 ** (a * held * held + b * held + c);
}
