import type { Grid } from "@rainreckon/core";

/** Waves that a field is made of: so many that their sum is all but normal. House rule. */
const WAVES = 200;

/**
 * A random field on a grid, normal with mean 0 and variance 1, correlated by exp(-distance / range).
 *
 * Waves of random direction, length and phase, their lengths drawn from the spectrum of that correlation in the plane,
 * 1 / (1 + k² range²)^(3/2): the spectral method (Shinozuka & Jan 1972, Journal of Sound and Vibration 25, 111-128; for
 * fields in the plane Mantoglou & Wilson 1982, Water Resources Research 18, 1379-1394). A wave is a product of what
 * hangs on the column and what hangs on the row, so that a cell costs two multiplications a wave, there is no matrix,
 * and no edge comes round again.
 *
 * @param uniform - numbers in [0, 1)
 * @param into - shape [ny, nx], filled
 */
export function randomField(
  { nx, ny, cellM }: Grid,
  rangeKm: number,
  uniform: () => number,
  into: Float64Array,
): void {
  const cellKm = cellM / 1000;
  const alongX = new Float64Array(2 * nx);
  into.fill(0);
  const amplitude = Math.sqrt(2 / WAVES);
  for (let wave = 0; wave < WAVES; wave++) {
    const direction = 2 * Math.PI * uniform();
    // Share of the spectrum below k: 1 - (1 + k² range²)^(-1/2), turned round.
    const length = Math.sqrt((1 - uniform()) ** -2 - 1) / rangeKm;
    const phase = 2 * Math.PI * uniform();
    const perColumn = length * Math.cos(direction) * cellKm;
    const perRow = length * Math.sin(direction) * cellKm;
    for (let column = 0; column < nx; column++) {
      alongX[2 * column] = Math.cos(perColumn * column + phase);
      alongX[2 * column + 1] = Math.sin(perColumn * column + phase);
    }
    for (let row = 0; row < ny; row++) {
      const c = amplitude * Math.cos(perRow * row);
      const s = amplitude * Math.sin(perRow * row);
      const at = row * nx;
      for (let column = 0; column < nx; column++) {
        into[at + column] += alongX[2 * column] * c - alongX[2 * column + 1] * s;
      }
    }
  }
}

/** A normal number (Box & Muller 1958, Annals of Mathematical Statistics 29, 610-611). */
export function normalNumber(uniform: () => number): number {
  return Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());
}
