const positions = new WeakMap<
  Int32Array,
  { readonly cellCount: number; readonly at: Int32Array | undefined }
>();

/**
 * Position of each cell among those that a headline is made of, -1 where it is none of them.
 *
 * @param headlineCells - flat cell indices, each once; positions are worked out once for each such array
 * @returns shape [cellCount], or undefined where the headline is made of all cells in their order
 */
export function headlinePositions(headlineCells: Int32Array, cellCount: number): Int32Array | undefined {
  const known = positions.get(headlineCells);
  if (known?.cellCount === cellCount) return known.at;
  const all = headlineCells.length === cellCount && headlineCells.every((cell, h) => cell === h);
  const at = all ? undefined : new Int32Array(cellCount).fill(-1);
  if (at !== undefined) for (let h = 0; h < headlineCells.length; h++) at[headlineCells[h]] = h;
  positions.set(headlineCells, { cellCount, at });
  return at;
}
