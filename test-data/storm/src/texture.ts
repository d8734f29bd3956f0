import type { RandomStream } from "./random.ts";

/** Side of a texture in cells of 1 km: a power of two, so that it wraps by a mask. */
export const TEXTURE_SIDE = 512;
const MASK = TEXTURE_SIDE - 1;

/**
 * A pattern without edges: random values on lattices of falling spacing, joined by smooth steps.
 * Mean 0, deviation 1. Shape [512, 512].
 *
 * @param spacingsKm - lattice spacings, powers of two; each adds `fade` times as much as the one before
 */
export function wrappedTexture(
  random: RandomStream,
  spacingsKm: readonly number[],
  fade: number,
): Float32Array {
  const texture = new Float32Array(TEXTURE_SIDE * TEXTURE_SIDE);
  let amplitude = 1;
  for (const spacing of spacingsKm) {
    const side = TEXTURE_SIDE / spacing;
    const lattice = Float64Array.from({ length: side * side }, () => random.between(-1, 1));
    const steps = Float64Array.from({ length: spacing }, (_, i) => {
      const s = i / spacing;
      return s * s * (3 - 2 * s);
    });
    for (let y = 0; y < TEXTURE_SIDE; y++) {
      const row = Math.floor(y / spacing);
      const v = steps[y % spacing]!;
      const low = row * side;
      const high = ((row + 1) % side) * side;
      for (let x = 0; x < TEXTURE_SIDE; x++) {
        const column = Math.floor(x / spacing);
        const next = (column + 1) % side;
        const u = steps[x % spacing]!;
        const south = lattice[low + column]! * (1 - u) + lattice[low + next]! * u;
        const north = lattice[high + column]! * (1 - u) + lattice[high + next]! * u;
        texture[y * TEXTURE_SIDE + x]! += amplitude * (south * (1 - v) + north * v);
      }
    }
    amplitude *= fade;
  }
  let mean = 0;
  for (const value of texture) mean += value / texture.length;
  let variance = 0;
  for (const value of texture) variance += (value - mean) ** 2 / texture.length;
  const scale = 1 / Math.sqrt(variance);
  return texture.map((value) => (value - mean) * scale);
}

/** The texture at a point, between its four neighbours. */
export function textureAt(texture: Float32Array, xKm: number, yKm: number): number {
  const column = Math.floor(xKm);
  const row = Math.floor(yKm);
  const u = xKm - column;
  const v = yKm - row;
  const west = column & MASK;
  const east = (column + 1) & MASK;
  const low = (row & MASK) * TEXTURE_SIDE;
  const high = ((row + 1) & MASK) * TEXTURE_SIDE;
  return (
    (texture[low + west]! * (1 - u) + texture[low + east]! * u) * (1 - v) +
    (texture[high + west]! * (1 - u) + texture[high + east]! * u) * v
  );
}

/**
 * A row of the moving texture: values at xKm = firstXKm, firstXKm + 1, … into `into`.
 * The fraction of a cell is the same all along, so four weights serve the whole row.
 */
export function textureRow(texture: Float32Array, firstXKm: number, yKm: number, into: Float32Array): void {
  const column = Math.floor(firstXKm);
  const row = Math.floor(yKm);
  const u = firstXKm - column;
  const v = yKm - row;
  const low = (row & MASK) * TEXTURE_SIDE;
  const high = ((row + 1) & MASK) * TEXTURE_SIDE;
  for (let i = 0; i < into.length; i++) {
    const west = (column + i) & MASK;
    const east = (column + i + 1) & MASK;
    into[i] =
      (texture[low + west]! * (1 - u) + texture[low + east]! * u) * (1 - v) +
      (texture[high + west]! * (1 - u) + texture[high + east]! * u) * v;
  }
}
