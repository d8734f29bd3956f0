import type { CheckValue, Json } from "./entries.ts";

type Tolerance = CheckValue["tolerance"];

/**
 * Where an answer differs from a check value by more than the value's tolerance, leaf by leaf.
 *
 * Objects may hold more than was expected, lists may not. An expected `null` is met by NaN, null and
 * undefined alone, "Infinity" by Infinity alone; texts and truth values must be equal.
 *
 * @returns one line per difference, with the path of the leaf; none when the answer holds
 */
export function differences(entry: CheckValue, actual: unknown): readonly string[] {
  const found: string[] = [];
  compare(entry.expected, actual, entry.tolerance, "", found);
  return found;
}

/** True when {@link differences} finds none. */
export function withinTolerance(entry: CheckValue, actual: unknown): boolean {
  return differences(entry, actual).length === 0;
}

function compare(expected: Json, actual: unknown, tolerance: Tolerance, path: string, found: string[]): void {
  const place = path === "" ? "value" : path;
  if (expected === null) {
    const undefinedValue = actual === null || actual === undefined || Number.isNaN(actual);
    if (!undefinedValue) found.push(`${place}: expected undefined, got ${String(actual)}`);
  } else if (expected === "Infinity") {
    if (actual !== Number.POSITIVE_INFINITY) found.push(`${place}: expected Infinity, got ${String(actual)}`);
  } else if (typeof expected === "number") {
    // Written so that NaN fails.
    const holds = typeof actual === "number" && Math.abs(actual - expected) <= allowed(expected, tolerance);
    if (!holds) {
      found.push(
        `${place}: expected ${expected} within ${tolerance.value} ${tolerance.type}, got ${String(actual)}`,
      );
    }
  } else if (typeof expected !== "object") {
    if (actual !== expected) found.push(`${place}: expected ${String(expected)}, got ${String(actual)}`);
  } else if (typeof actual !== "object" || actual === null) {
    found.push(`${place}: expected parts, got ${String(actual)}`);
  } else if (isList(expected)) {
    const list = actual as ArrayLike<unknown>;
    if (list.length !== expected.length) {
      found.push(`${place}: expected ${expected.length} items, got ${String(list.length)}`);
      return;
    }
    expected.forEach((item, index) => {
      compare(item, list[index], tolerance, `${path}[${index}]`, found);
    });
  } else {
    for (const [key, item] of Object.entries(expected)) {
      const part = (actual as Record<string, unknown>)[key];
      compare(item, part, tolerance, path === "" ? key : `${path}.${key}`, found);
    }
  }
}

function allowed(expected: number, { type, value }: Tolerance): number {
  if (type === "exact") return 0;
  return type === "absolute" ? value : value * Math.abs(expected);
}

/** `Array.isArray` does not narrow readonly lists. */
function isList(value: Json): value is readonly Json[] {
  return Array.isArray(value);
}
