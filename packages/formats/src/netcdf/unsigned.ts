import type { StoredValues } from "@rainreckon/core";

/**
 * Signed whole numbers of which the file says `_Unsigned = "true"`: classic NetCDF has no unsigned types.
 *
 * @see NetCDF Users Guide, appendix on attribute conventions, `_Unsigned` (Unidata)
 */
export function asUnsigned(values: StoredValues): StoredValues {
  return values instanceof Int16Array
    ? new Uint16Array(values.buffer, values.byteOffset, values.length)
    : values;
}
