/*
 * The `from` and `filter` of typed arrays with a callback go through an iterator and cost several times a
 * plain loop; rows come by the million.
 */

/** 0, 1, 2, … */
export function indices(count: number): Uint32Array {
  const result = new Uint32Array(count);
  for (let index = 0; index < count; index++) result[index] = index;
  return result;
}

/** The values at some places, in that order. */
export function pick(values: Float64Array, places: Uint32Array): Float64Array {
  const result = new Float64Array(places.length);
  for (let index = 0; index < places.length; index++) result[index] = values[places[index]];
  return result;
}

/** Those of some places whose value is a number, in the same order. */
export function placesOfNumbers(values: Float64Array, places: Uint32Array): Uint32Array {
  const result = new Uint32Array(places.length);
  let count = 0;
  for (let index = 0; index < places.length; index++) {
    if (Number.isNaN(values[places[index]])) continue;
    result[count] = places[index];
    count += 1;
  }
  return result.subarray(0, count);
}
