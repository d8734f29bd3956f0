import type { Notice } from "@rainreckon/core";
import { displayText } from "./display-text.ts";

/** Most notices of one kind that are told one by one; the rest are counted. */
const TOLD_ONE_BY_ONE = 10;
const MAX_PART_LENGTH = 1000;

export type OnNotice = (notice: Notice) => void;

/** Tells the faults of one kind one by one up to a limit, and counts the rest. */
export class FileNotices {
  readonly #onNotice: OnNotice;
  readonly #untold = new Map<string, { count: number; where: string; fix: string }>();
  readonly #told = new Map<string, number>();

  constructor(onNotice: OnNotice) {
    this.#onNotice = onNotice;
  }

  /**
   * @param kind - a few words naming the fault in the plural, as in "12 more stamps that cannot be read"
   * @param path - the file; `lines` the lines in it, where the fault has some
   */
  tell(kind: string, what: string, path: string, lines: readonly number[], fix: string): void {
    const told = this.#told.get(kind) ?? 0;
    if (told < TOLD_ONE_BY_ONE) {
      this.#told.set(kind, told + 1);
      this.#send(what, place(path, lines), fix);
      return;
    }
    const untold = this.#untold.get(kind);
    if (untold === undefined) this.#untold.set(kind, { count: 1, where: path, fix });
    else untold.count += 1;
  }

  /** Says how many were not told one by one. To be called once, at the end. */
  close(): void {
    for (const [kind, { count, where, fix }] of this.#untold) this.#send(`${count} more ${kind}`, where, fix);
    this.#untold.clear();
  }

  #send(what: string, where: string, fix: string): void {
    this.#onNotice({
      what: displayText(what, MAX_PART_LENGTH),
      where: displayText(where, MAX_PART_LENGTH),
      fix: displayText(fix, MAX_PART_LENGTH),
    });
  }
}

/** "gauges.csv, line 7" or "gauges.csv, lines 7 and 9". */
export function place(path: string, lines: readonly number[]): string {
  if (lines.length === 0) return path;
  if (lines.length === 1) return `${path}, line ${lines[0]}`;
  return `${path}, lines ${lines.slice(0, -1).join(", ")} and ${lines[lines.length - 1]}`;
}
