/** Something worked out from a part of a file, and how sure it is. */
export interface Guess<T> {
  readonly value: T;
  /** found: the file says so. guessed: it looks so. */
  readonly standing: "found" | "guessed";
  readonly reason: string;
}

export function found<T>(value: T, reason: string): Guess<T> {
  return { value, standing: "found", reason };
}

export function guessed<T>(value: T, reason: string): Guess<T> {
  return { value, standing: "guessed", reason };
}
