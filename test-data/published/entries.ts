import { readFileSync } from "node:fs";

/** What a JSON file can hold. */
export type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json };

/** The two collections that the check values came in. */
export const BOOKS = ["radar-physics", "verification-and-merging"] as const;
export type Book = (typeof BOOKS)[number];

/** One number (or a few that belong together) that no one here computed, and where it comes from. */
export interface CheckValue {
  readonly book: Book;
  readonly id: string;
  /** A letter and a name, "c-zr-relations": unique over both books. */
  readonly topic: string;
  readonly quantity: string;
  /** Keys carry their units. */
  readonly inputs: { readonly [key: string]: Json };
  /** `null` is undefined (0/0, or no data), the string "Infinity" a limit of plus infinity. */
  readonly expected: Json;
  readonly unit: string;
  readonly tolerance: { readonly type: "absolute" | "relative" | "exact"; readonly value: number };
  readonly source: string;
  /** Standing, as README.md explains it. */
  readonly kind: string;
  readonly note?: string;
}

/** Kinds that a function must reproduce; the others are customs and recollections: sanity ranges at most. */
const BINDING_KINDS = [
  "published table",
  "worked example",
  "closed form",
  "computed independently (scipy)",
  "computed independently (R/scipy, with the call)",
];

/** True where the value is a test of the function that answers for it, not only a sanity range. */
export function isBinding(entry: CheckValue): boolean {
  return BINDING_KINDS.includes(entry.kind);
}

let cached: readonly CheckValue[] | undefined;

/** Every check value of both books, in the order of the files. */
export function allCheckValues(): readonly CheckValue[] {
  cached ??= BOOKS.flatMap((book) => {
    const text = readFileSync(new URL(`./${book}.json`, import.meta.url), "utf8");
    return (JSON.parse(text) as Omit<CheckValue, "book">[]).map((entry) => ({ book, ...entry }));
  });
  return cached;
}

/**
 * The check values of the topics that start with a prefix.
 *
 * @param topicPrefix - "c-zr-relations" or a beginning of it; a bare "c-" finds topics of both books
 * @returns entries in the order of the files, never none
 * @throws RangeError if no topic starts so
 */
export function checkValues(topicPrefix: string): readonly CheckValue[] {
  const found = allCheckValues().filter((entry) => entry.topic.startsWith(topicPrefix));
  if (found.length === 0) throw new RangeError(`no topic of check values starts with "${topicPrefix}"`);
  return found;
}

/** One check value by its id. @throws RangeError if there is none */
export function checkValue(id: string): CheckValue {
  const found = allCheckValues().find((entry) => entry.id === id);
  if (found === undefined) throw new RangeError(`no check value has the id "${id}"`);
  return found;
}

/** A number among an entry's inputs. @throws RangeError if it is absent or not a number */
export function inputNumber(entry: CheckValue, key: string): number {
  const value = entry.inputs[key];
  if (typeof value !== "number") throw new RangeError(`check value ${entry.id} has no number "${key}"`);
  return value;
}

/** A list of numbers among an entry's inputs. @throws RangeError if it is absent or holds anything else */
export function inputNumbers(entry: CheckValue, key: string): readonly number[] {
  const value = entry.inputs[key];
  if (!Array.isArray(value) || !value.every((item): item is number => typeof item === "number")) {
    throw new RangeError(`check value ${entry.id} has no list of numbers "${key}"`);
  }
  return value;
}
