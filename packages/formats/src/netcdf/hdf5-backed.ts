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
  readonly #kinds = new Map<string, "group" | "array" | undefined>();
  readonly #listings = new Map<string, readonly string[]>();

  constructor(file: Hdf5File) {
    this.path = file.path;
    this.#file = file;
  }

  variables(group: string): readonly string[] {
    return this.#children(group).filter((name) => this.#kindOf(variablePath(group, name)) === "array");
  }

  groups(): readonly string[] {
    return this.#children("").filter((name) => this.#kindOf(name) === "group");
  }

  shapeOf(variable: string): readonly number[] | undefined {
    return this.#kindOf(variable) === "array" ? this.#file.numericShape(`/${variable}`) : undefined;
  }

  attribute(object: string, name: string): AttributeValue | undefined {
    const path = `/${object}`;
    // Names are listed once: asking for what is absent, as most optional attributes are, costs more than listing.
    if (object !== "" && this.#kindOf(object) === undefined) return undefined;
    return this.#file.attributeNames(path).has(name) ? this.#file.attribute(path, name) : undefined;
  }

  numbers(variable: string): Float64Array {
    return this.#file.readNumbers(`/${variable}`);
  }

  stored(variable: string): StoredValues {
    const object = `/${variable}`;
    const unsigned = this.attribute(variable, "_Unsigned") === "true";
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

  /** Looked up among the names of the group that holds it, and then remembered. */
  #kindOf(object: string): "group" | "array" | undefined {
    if (this.#kinds.has(object)) return this.#kinds.get(object);
    const slash = object.lastIndexOf("/");
    const group = slash < 0 ? "" : object.slice(0, slash);
    const isListed =
      (group === "" || this.#kindOf(group) === "group") &&
      this.#children(group).includes(object.slice(slash + 1));
    const kind = isListed ? this.#file.kindOf(`/${object}`) : undefined;
    this.#kinds.set(object, kind);
    return kind;
  }

  #children(group: string): readonly string[] {
    const known = this.#listings.get(group);
    if (known !== undefined) return known;
    const names = (this.#file.children(`/${group}`) ?? []).slice(0, MAX_NAMES);
    this.#listings.set(group, names);
    return names;
  }
}
