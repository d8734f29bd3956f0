import { writeText } from "./text.ts";

/** What JSON can hold. A property that is `undefined` is left out. */
export type JsonValue =
  | string
  | number
  | boolean
  | null
  | readonly JsonValue[]
  | { readonly [key: string]: JsonValue | undefined };

/**
 * A value as JSON text that is the same whatever order its keys were set in: keys by code unit,
 * two spaces of indent, a line feed at the end.
 *
 * NaN and infinities have no JSON form and are not made null here, because a null needs its reason
 * beside it: the caller writes both (see {@link finiteOrNull}).
 *
 * @throws RangeError naming the place of a number that is not finite, and of anything JSON cannot hold
 * @remarks RFC 8259 (Bray, 2017).
 */
export function toJson(value: JsonValue): string {
  return `${JSON.stringify(inKeyOrder(value, "$", []), null, 2)}\n`;
}

/** The same value on one line, with the same checks and the same key order. @throws as {@link toJson} */
export function toJsonLine(value: JsonValue): string {
  return JSON.stringify(inKeyOrder(value, "$", []));
}

/**
 * Write {@link toJson} of a value to exactly this path. On failure the file is left incomplete.
 *
 * @throws RangeError as {@link toJson}, before anything is written; InputError when the file cannot be written
 */
export async function writeJson(path: string, value: JsonValue): Promise<void> {
  await writeText(path, toJson(value));
}

/** The number, or null where it is NaN or infinite; the reason goes beside it. */
export function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function inKeyOrder(value: unknown, place: string, above: readonly object[]): JsonValue {
  if (value === null || typeof value === "string" || typeof value === "boolean") return value;
  if (typeof value === "number") {
    if (!Number.isFinite(value)) {
      throw new RangeError(`${place} is ${value}, which JSON cannot hold: write null and the reason`);
    }
    return value;
  }
  if (typeof value !== "object") throw new RangeError(`${place} is ${typeof value}, which JSON cannot hold`);
  if (above.includes(value)) throw new RangeError(`${place} holds itself`);
  const inside = [...above, value];
  if (Array.isArray(value)) {
    // Array.from visits holes too, so that they are refused and not skipped.
    return Array.from(value, (item, index) => inKeyOrder(item, `${place}[${index}]`, inside));
  }
  const prototype: unknown = Object.getPrototypeOf(value);
  if (prototype !== Object.prototype && prototype !== null) {
    throw new RangeError(`${place} is a ${value.constructor.name}, which JSON cannot hold`);
  }
  const entries = Object.entries(value).filter(([, item]) => item !== undefined);
  entries.sort(([a], [b]) => (a < b ? -1 : 1));
  const sorted: Record<string, JsonValue> = Object.create(null);
  for (const [key, item] of entries) sorted[key] = inKeyOrder(item, `${place}.${key}`, inside);
  return sorted;
}
