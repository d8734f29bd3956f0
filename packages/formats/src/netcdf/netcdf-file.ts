import type { StoredValues } from "@rainreckon/core";
import type { AttributeValue } from "../hdf5/index.ts";

/** Most elements that one variable may hold; asked before anything is allocated. */
export const MAX_VARIABLE_ELEMENTS = 64_000_000;

/**
 * A NetCDF file open for reading, classic or NetCDF-4 alike. Variables and groups are named without a leading
 * slash, a variable of a group as "group/variable".
 *
 * Every method throws `InputError` naming file and variable where the file is damaged there.
 */
export interface NetcdfFile {
  /** As it was handed in. */
  readonly path: string;
  readonly kind: "NetCDF-3" | "NetCDF-4";
  /** Names of the variables of a group ("" is the root), without the group's name, in the order of the file. */
  variables(group: string): readonly string[];
  /** Names of the groups at the root. Classic files have none. */
  groups(): readonly string[];
  /** Shape of a variable of numbers (a scalar is []), or undefined where there is none of that name. */
  shapeOf(variable: string): readonly number[] | undefined;
  /** An attribute of a variable, or of a group ("" is the root). */
  attribute(object: string, name: string): AttributeValue | undefined;
  /** Any numbers as float64, as they are stored: neither scaled nor with fill values replaced. */
  numbers(variable: string): Float64Array;
  /** As they are stored, in the smallest type that keeps them: int8 becomes int16, unless marked `_Unsigned`. */
  stored(variable: string): StoredValues;
  /** Closes the file; a second time does nothing. */
  close(): void;
}

/** A single number of an attribute, or undefined where it is absent or no number. */
export function numberAttribute(file: NetcdfFile, object: string, name: string): number | undefined {
  const value = file.attribute(object, name);
  if (typeof value === "number") return value;
  return value instanceof Float64Array && value.length === 1 ? value[0] : undefined;
}

/** A text of an attribute, or undefined where it is absent or no text. */
export function textAttribute(file: NetcdfFile, object: string, name: string): string | undefined {
  const value = file.attribute(object, name);
  return typeof value === "string" ? value : undefined;
}

/** "variable" at the root, else "group/variable". */
export function variablePath(group: string, variable: string): string {
  return group === "" ? variable : `${group}/${variable}`;
}
