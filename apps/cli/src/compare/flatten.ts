/** Members by which the items of a list are known, rather than by where they stand in it. */
const NAMING_KEYS = ["id", "name", "network"] as const;

/**
 * The single values of a structure by their paths: `radars[SALT].offsetDb`.
 *
 * Items of a list go by their id, name or network where that tells them apart, so that an item that was put
 * in front does not make all the others look changed.
 */
export function flatten(value: unknown, path = ""): Map<string, unknown> {
  const found = new Map<string, unknown>();
  const visit = (inner: unknown, at: string) => {
    if (Array.isArray(inner)) {
      const names = itemNames(inner);
      inner.forEach((item, index) => {
        visit(item, `${at}[${names?.[index] ?? index}]`);
      });
      if (inner.length === 0) found.set(at, "none");
    } else if (inner !== null && typeof inner === "object") {
      for (const [key, member] of Object.entries(inner)) visit(member, at === "" ? key : `${at}.${key}`);
    } else {
      found.set(at, inner);
    }
  };
  visit(value, path);
  return found;
}

function itemNames(items: readonly unknown[]): string[] | undefined {
  for (const key of NAMING_KEYS) {
    const names = items.map((item) => (item as Record<string, unknown> | null)?.[key]);
    const allTexts = names.every((name) => typeof name === "string");
    if (allTexts && new Set(names).size === names.length) return names as string[];
  }
  return undefined;
}

/** One value that differs between two structures; null where one of them does not have it. */
export interface Difference {
  readonly path: string;
  readonly a: string | number | boolean | null;
  readonly b: string | number | boolean | null;
}

/** Values of two structures that differ, in the order of their paths. */
export function differences(a: unknown, b: unknown): Difference[] {
  const inA = flatten(a);
  const inB = flatten(b);
  const paths = [...new Set([...inA.keys(), ...inB.keys()])].sort((x, y) => (x < y ? -1 : 1));
  return paths
    .filter((path) => !Object.is(inA.get(path), inB.get(path)))
    .map((path) => ({ path, a: plain(inA.get(path)), b: plain(inB.get(path)) }));
}

function plain(value: unknown): string | number | boolean | null {
  if (value === undefined || value === null) return null;
  return typeof value === "number" || typeof value === "boolean" ? value : String(value);
}
