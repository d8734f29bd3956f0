import { InputError, type Moment, type StoredValues } from "@rainreckon/core";
import { type NetcdfFile, numberAttribute } from "../../netcdf/index.ts";
import { type Scaling, toPhysical } from "../physical.ts";

/**
 * How a packed variable becomes numbers: value = stored * scale_factor + add_offset. `_FillValue` and
 * `missing_value` are not observed; `_Undetect` of WMO FM 301 is observed, below detection.
 *
 * @see CF Conventions 1.11 (2023), section 8.1, "Packed Data"; WMO-No. 306, FM 301 (2022), moment variables
 * @throws InputError where the scale makes every gate the same
 */
export function packing(file: NetcdfFile, variable: string): Scaling & { readonly alsoNodata?: number } {
  const gain = numberAttribute(file, variable, "scale_factor") ?? 1;
  const offset = numberAttribute(file, variable, "add_offset") ?? 0;
  if (gain === 0 || !Number.isFinite(gain) || !Number.isFinite(offset)) {
    throw new InputError(
      `the scale_factor of ${variable} is ${gain} and its add_offset ${offset}`,
      `${file.path}, ${variable}`,
      "correct them: with these every gate has the same value or none",
    );
  }
  const fill = numberAttribute(file, variable, "_FillValue");
  const missing = numberAttribute(file, variable, "missing_value");
  const undetect = numberAttribute(file, variable, "_Undetect");
  const nodata = fill ?? missing;
  return {
    gain,
    offset,
    ...(nodata === undefined ? {} : { nodata }),
    ...(missing === undefined || missing === nodata ? {} : { alsoNodata: missing }),
    ...(undetect === undefined ? {} : { undetect }),
  };
}

/** A moment from packed values, which are changed in place. */
export function packedMoment(
  quantity: string,
  stored: StoredValues,
  { alsoNodata, ...scale }: ReturnType<typeof packing>,
): Moment {
  if (alsoNodata !== undefined && scale.nodata !== undefined) {
    for (let i = 0; i < stored.length; i++) if (stored[i] === alsoNodata) stored[i] = scale.nodata;
  }
  const codes = unsignedCodes(stored, scale);
  if (stored instanceof Float32Array || stored instanceof Float64Array) {
    return { quantity, stored, ...toPhysical(stored, codes) };
  }
  return { quantity, stored, ...codes };
}

/** Codes of unsigned values may be written in the signed type that the file has for them. */
function unsignedCodes(stored: StoredValues, scale: Scaling): Scaling {
  const span = stored instanceof Uint8Array ? 256 : stored instanceof Uint16Array ? 65_536 : 0;
  const turned = (code: number | undefined) => (code !== undefined && code < 0 ? code + span : code);
  const nodata = turned(scale.nodata);
  const undetect = turned(scale.undetect);
  return {
    gain: scale.gain,
    offset: scale.offset,
    ...(nodata === undefined ? {} : { nodata }),
    ...(undetect === undefined ? {} : { undetect }),
  };
}
