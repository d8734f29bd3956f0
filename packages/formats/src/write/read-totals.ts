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

/** Layers of one variable of a totals file, read one at a time, so that a year of maps needs the room of one. */
export interface TotalsLayers {
  /** Shape [ny, nx], float32 with NaN for not observed. @throws InputError where the file is damaged */
  layer(index: number): Float32Array;
  close(): void;
}

/**
 * Opens a variable over time of a totals file, such as `radar_depth`.
 *
 * @returns undefined where the file holds no variable of that name
 * @throws InputError where the file is damaged, or the variable is no float32
 */
export async function openTotalsLayers(path: string, name: string): Promise<TotalsLayers | undefined> {
  await hdf5Ready();
  const file = openHdf5(path);
  if (file.kindOf(`/${name}`) !== "array") {
    file.close();
    return undefined;
  }
  return {
    layer(index) {
      const values = file.readLayer(`/${name}`, index);
      if (values instanceof Float32Array) return values;
      throw new InputError(`${name} is no variable of float32`, path, "run total again");
    },
    close: () => file.close(),
  };
}
