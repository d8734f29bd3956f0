import { InputError } from "@rainreckon/core";
import { hdf5Ready, MAX_ELEMENTS, openHdf5 } from "../hdf5/index.ts";

/**
 * Variables of a totals file as they are stored: float32 with NaN for not observed, in the order of the file.
 *
 * @param names - those wanted; one that the file does not hold, or that is larger than can be read at once, is
 *   missing from the answer
 * @throws InputError where the file is damaged, or a variable is no float32
 */
export async function readTotals(
  path: string,
  names: readonly string[],
): Promise<ReadonlyMap<string, Float32Array>> {
  await hdf5Ready();
  const file = openHdf5(path);
  try {
    const found = new Map<string, Float32Array>();
    for (const name of names) {
      const known = file.describe(`/${name}`);
      if (known === undefined || known.elementCount > MAX_ELEMENTS) continue;
      const values = file.read(`/${name}`);
      if (!(values instanceof Float32Array))
        throw new InputError(`${name} is no variable of float32`, path, "run total again");
      found.set(name, values);
    }
    return found;
  } finally {
    file.close();
  }
}
