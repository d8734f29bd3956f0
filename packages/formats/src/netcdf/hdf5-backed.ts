import type { StoredValues } from "@rainreckon/core";
import { type AttributeValue, type Hdf5File, openHdf5 } from "../hdf5/index.ts";
import { type NetcdfFile, variablePath } from "./netcdf-file.ts";
import { asUnsigned } from "./unsigned.ts";

const MAX_NAMES = 10_000;

/** A NetCDF-4 file, which is an HDF5 file. @throws InputError where it is damaged or no HDF5 */
export function openHdf5Backed(path: string): NetcdfFile {
  return netcdfOf(openHdf5(path));
}

/** The NetCDF view of an HDF5 file that is open already; closing it closes that file. */
export function netcdfOf(file: Hdf5File): NetcdfFile {
  return new Hdf5Backed(file);
}

class Hdf5Backed implements NetcdfFile {
  readonly path: string;
  readonly kind = "NetCDF-4";
  readonly #file: Hdf5File;

  constructor(file: Hdf5File) {
    this.path = file.path;
    this.#file = file;
  }

  variables(group: string): readonly string[] {
    return this.#children(group).filter(
      (name) => this.#file.kindOf(`/${variablePath(group, name)}`) === "array",
    );
  }

  groups(): readonly string[] {
    return this.#children("").filter((name) => this.#file.kindOf(`/${name}`) === "group");
  }

  shapeOf(variable: string): readonly number[] | undefined {
    return this.#file.numericShape(`/${variable}`);
  }

  attribute(object: string, name: string): AttributeValue | undefined {
    return this.#file.attribute(`/${object}`, name);
  }

  numbers(variable: string): Float64Array {
    return this.#file.readNumbers(`/${variable}`);
  }

  stored(variable: string): StoredValues {
    const object = `/${variable}`;
    const unsigned = this.#file.attribute(object, "_Unsigned") === "true";
    const type = this.#file.elementTypeName(object);
    if (type !== "int8") {
      const values = this.#file.read(object);
      return unsigned ? asUnsigned(values) : values;
    }
    const values = Int8Array.from(this.#file.readNumbers(object));
    return unsigned ? new Uint8Array(values.buffer) : Int16Array.from(values);
  }

  close(): void {
    this.#file.close();
  }

  #children(group: string): readonly string[] {
    return (this.#file.children(`/${group}`) ?? []).slice(0, MAX_NAMES);
  }
}
