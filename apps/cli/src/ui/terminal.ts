import type { Command } from "commander";
import { createColors } from "picocolors";

/** Flags that every command takes. */
export interface CommonFlags {
  readonly json?: boolean;
  readonly quiet?: boolean;
  readonly debug?: boolean;
  /** commander turns --no-color into `color: false`. */
  readonly color?: boolean;
}

/** Where a command speaks: results on stdout, everything else on stderr. */
export interface Terminal {
  readonly json: boolean;
  readonly quiet: boolean;
  readonly debug: boolean;
  /** True where stderr is a terminal and nobody asked for silence: only then is progress drawn. */
  readonly live: boolean;
  /** One result, ended by a line break. */
  result(text: string): void;
  /** A line for people on stderr; silent under --quiet. */
  note(text: string): void;
  /** Text to stand out on stdout, where that is a terminal that shows colours. */
  strong(text: string): string;
}

/** The terminal of a command, by the flags it was given. */
export function terminalOf(command: Command): Terminal {
  const flags = command.optsWithGlobals<CommonFlags>();
  const quiet = flags.quiet === true;
  const noColour =
    flags.color === false || (process.env.NO_COLOR ?? "") !== "" || process.env.TERM === "dumb";
  const colours = createColors(!noColour && process.stdout.isTTY === true);
  return {
    json: flags.json === true,
    quiet,
    debug: flags.debug === true,
    live: !quiet && process.stderr.isTTY === true,
    result: (text) => {
      process.stdout.write(`${text}\n`);
    },
    note: (text) => {
      if (!quiet) process.stderr.write(`${text}\n`);
    },
    strong: (text) => colours.bold(text),
  };
}
