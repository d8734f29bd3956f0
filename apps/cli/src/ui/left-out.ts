import type { Notice } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import type { ManifestNotice } from "../manifest.ts";
import type { Terminal } from "./terminal.ts";

const MAX_LINES_PER_KIND = 20;

/**
 * What was left out, capped, filled or assumed: one line each on stderr as it comes, twenty of a kind at most,
 * and all of it for the manifest.
 */
export interface LeftOutLog {
  /** @param kind - short words that group what is alike: "scan left out", "gauge reading doubted" */
  add(kind: string, notice: Notice, count?: number): void;
  /** Says how many lines of each kind were not printed. */
  finish(): void;
  /** Everything that was added, in order; equal notices are one with their count. */
  readonly all: readonly ManifestNotice[];
  /** How often anything was added. */
  readonly count: number;
}

export function leftOutLog(terminal: Terminal): LeftOutLog {
  const notices = new Map<string, ManifestNotice>();
  const linesOfKind = new Map<string, number>();
  let total = 0;
  return {
    add(kind, notice, count = 1) {
      total += count;
      const key = JSON.stringify([kind, notice.what, notice.where, notice.fix]);
      const known = notices.get(key);
      notices.set(key, {
        kind,
        what: notice.what,
        where: notice.where,
        fix: notice.fix,
        count: (known?.count ?? 0) + count,
      });
      if (known !== undefined) return;
      const lines = (linesOfKind.get(kind) ?? 0) + 1;
      linesOfKind.set(kind, lines);
      if (lines <= MAX_LINES_PER_KIND) terminal.note(noticeLine(notice));
    },
    finish() {
      for (const [kind, lines] of linesOfKind) {
        if (lines > MAX_LINES_PER_KIND)
          terminal.note(`and ${lines - MAX_LINES_PER_KIND} more: ${displayText(kind)}`);
      }
    },
    get all() {
      return [...notices.values()];
    },
    get count() {
      return total;
    },
  };
}

/** One line for an input that is left out: where, what, what to do. */
export function noticeLine(notice: Notice): string {
  return displayText(`${notice.where}: ${notice.what}; ${notice.fix}`, 600);
}
