import type { Moment } from "@rainreckon/core";

/** How stored numbers become physical ones. */
export type Scaling = Omit<Moment, "quantity" | "stored">;

/**
 * Floating types hold physical values in our own terms. A file that scales them all the same is brought to that
 * in place; its codes then have no place among the values, so they become NaN and -Infinity themselves.
 */
export function toPhysical(stored: Float32Array | Float64Array, scale: Scaling): Scaling {
  if (scale.gain === 1 && scale.offset === 0) return scale;
  for (let i = 0; i < stored.length; i++) {
    const value = stored[i];
    if (value === scale.nodata) stored[i] = Number.NaN;
    else if (value === scale.undetect) stored[i] = Number.NEGATIVE_INFINITY;
    else stored[i] = value * scale.gain + scale.offset;
  }
  return { gain: 1, offset: 0 };
}
