import { InputError } from "@rainreckon/core";
import type { AttributeValue, Hdf5File } from "../../hdf5/index.ts";

/** The groups of attributes that ODIM_H5 knows at each level. */
export type AttributeGroup = "what" | "where" | "how";

/** One level of an ODIM_H5 file: the root, a dataset, or one of its data groups. */
export interface Level {
  /** Path of the level without a closing slash: "" for the root, "/dataset1", "/dataset1/data2". */
  readonly path: string;
  /** Names of what it holds. */
  readonly children: ReadonlySet<string>;
}

/**
 * Attributes as ODIM_H5 means them: what a level does not say holds from the level above it.
 *
 * @see ODIM_H5 2.3, OPERA Data Information Model for HDF5, EUMETNET OPERA (2019), section 3: "how" attributes
 * stand at the level where they hold, and the nearest wins
 */
export class LevelAttributes {
  readonly #file: Hdf5File;
  readonly #levels: readonly Level[];

  /** @param levels - nearest first */
  constructor(file: Hdf5File, levels: readonly Level[]) {
    this.#file = file;
    this.#levels = levels;
  }

  /** A single number, or undefined where no level has it. @throws InputError where it is none */
  number(group: AttributeGroup, name: string): number | undefined {
    const found = this.#find(group, name);
    if (found === undefined) return undefined;
    if (typeof found.value === "number") return found.value;
    throw this.#wrongKind(found, "a number");
  }

  /** A single text, or undefined where no level has it. @throws InputError where it is none */
  text(group: AttributeGroup, name: string): string | undefined {
    const found = this.#find(group, name);
    if (found === undefined) return undefined;
    if (typeof found.value === "string") return found.value;
    throw this.#wrongKind(found, "a text");
  }

  /** One number a ray, or undefined where no level has such an attribute or it holds no numbers. */
  numbers(group: AttributeGroup, name: string): Float64Array | undefined {
    const value = this.#find(group, name)?.value;
    if (typeof value === "number") return Float64Array.of(value);
    return value instanceof Float64Array ? value : undefined;
  }

  #find(group: AttributeGroup, name: string): Found | undefined {
    for (const level of this.#levels) {
      if (!level.children.has(group)) continue;
      const object = `${level.path}/${group}`;
      // Nearly all of "how" is optional: with the names at hand, what is absent costs nothing to ask for.
      if (group === "how") this.#file.attributeNames(object);
      const value = this.#file.attribute(object, name);
      if (value !== undefined) return { value, object, name };
    }
    return undefined;
  }

  #wrongKind(found: Found, expected: string): InputError {
    const where = `${this.#file.path}, ${found.object.slice(1)}`;
    return new InputError(`the attribute ${found.name} is not ${expected}`, where, `store it as ${expected}`);
  }
}

interface Found {
  readonly value: AttributeValue;
  readonly object: string;
  readonly name: string;
}
