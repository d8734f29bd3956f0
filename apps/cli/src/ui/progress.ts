import cliProgress from "cli-progress";
import type { Terminal } from "./terminal.ts";

/** How far a long piece of work has come. */
export interface Progress {
  advance(steps?: number): void;
  end(): void;
}

const SILENT: Progress = { advance: () => undefined, end: () => undefined };

/**
 * A progress bar on stderr; nothing at all where stderr is no terminal.
 *
 * @param total - number of steps
 * @param noun - what is counted: "files"
 */
export function progressBar(terminal: Terminal, total: number, noun: string): Progress {
  if (!terminal.live || total === 0) return SILENT;
  const bar = new cliProgress.SingleBar({
    format: `{bar} {value} of {total} ${noun}, {eta_formatted} to go`,
    stream: process.stderr,
    clearOnComplete: true,
    hideCursor: true,
    barCompleteChar: "=",
    barIncompleteChar: " ",
  });
  bar.start(total, 0);
  return {
    advance: (steps = 1) => bar.increment(steps),
    end: () => bar.stop(),
  };
}
