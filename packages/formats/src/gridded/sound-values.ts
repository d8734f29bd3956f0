import type { GriddedHeader, GriddedScan } from "./gridded-file.ts";

/**
 * A layer whose impossible values, negative or endless rates and depths, count as not observed: most are codes that
 * the file does not tell of. How many there were is said.
 *
 * @param values - changed in place
 */
export function soundLayer(header: GriddedHeader, values: Float32Array): GriddedScan {
  const isReflectivity = header.quantity === "reflectivityDbz";
  let impossible = 0;
  for (let cell = 0; cell < values.length; cell++) {
    const value = values[cell] as number;
    if (
      Number.isNaN(value) ||
      (isReflectivity ? value < Number.POSITIVE_INFINITY : value >= 0 && value < Infinity)
    ) {
      continue;
    }
    values[cell] = Number.NaN;
    impossible++;
  }
  if (impossible === 0) return { ...header, values };
  const remark = `${impossible} cells hold a negative or endless value and count as not observed.`;
  return { ...header, values, remarks: [...header.remarks, remark] };
}
