import { type FaultKind, InputError } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";

/** What the exit status of a command means; the same for every command. */
export const EXIT = {
  /** Done; what was left out is counted on stderr. */
  done: 0,
  /** Failed midway, or something was left out under --strict. */
  failed: 1,
  /** Wrong usage or plan, output not writable, or a folder that holds another run. */
  usage: 2,
  noInput: 3,
  interrupted: 130,
} as const;

/** `input` gets as far as the exit only where it is the one input that the command lives on. */
const STATUS_OF_KIND: Readonly<Record<FaultKind, number>> = {
  input: EXIT.noInput,
  "no-input": EXIT.noInput,
  usage: EXIT.usage,
  midway: EXIT.failed,
};

/** Exit status for whatever ended a command. */
export function exitStatusOf(error: unknown): number {
  return STATUS_OF_KIND[asInputError(error).kind];
}

const MAX_FAULTS_PRINTED = 20;
const MAX_TEXT = 600;

/**
 * What to print on stderr for whatever ended a command: three lines a fault.
 *
 * Faults that travel with the first (the others of one plan) follow it, twenty at most.
 *
 * @param debug - true adds the stack
 */
export function errorText(error: unknown, debug: boolean): string {
  const first = asInputError(error);
  const others = furtherFaults(first);
  const lines = [first, ...others.slice(0, MAX_FAULTS_PRINTED - 1)].flatMap((fault) => [
    `error: ${displayText(fault.what, MAX_TEXT)}`,
    `  where: ${displayText(fault.where, MAX_TEXT)}`,
    `  fix:   ${displayText(fault.fix, MAX_TEXT)}`,
  ]);
  const unsaid = others.length + 1 - MAX_FAULTS_PRINTED;
  if (unsaid > 0) lines.push(`and ${unsaid} more faults`);
  if (debug && error instanceof Error) lines.push(error.stack ?? "no stack");
  return lines.join("\n");
}

function furtherFaults(error: InputError): InputError[] {
  const { cause } = error;
  if (!(cause instanceof AggregateError)) return [];
  return cause.errors.filter((one): one is InputError => one instanceof InputError);
}

/** Any error in the three parts that people can act on. */
function asInputError(error: unknown): InputError {
  if (error instanceof InputError) return error;
  const code = systemCode(error);
  const where = systemPath(error);
  if (code === "ENOSPC" || code === "EDQUOT") {
    return new InputError(
      "the disk is full",
      where,
      "make room and run the same command again: it goes on where it stopped",
      {
        kind: "midway",
        cause: error,
      },
    );
  }
  if (code === "EACCES" || code === "EPERM" || code === "EROFS") {
    return new InputError(
      "not allowed to read or write here",
      where,
      "choose another folder, or change its permissions",
      {
        kind: "usage",
        cause: error,
      },
    );
  }
  if (code === "ENOTDIR" || code === "EISDIR" || code === "EEXIST" || code === "ENOENT") {
    return new InputError(
      "there is no way to this file, or a folder stands in its place",
      where,
      "choose another path",
      {
        kind: "usage",
        cause: error,
      },
    );
  }
  const message = error instanceof Error ? error.message : String(error);
  return new InputError(
    `unexpected: ${message}`,
    where,
    "this is a fault of the program: run again with --debug and report the stack",
    { kind: "midway", cause: error },
  );
}

function systemCode(error: unknown): string | undefined {
  return (error as NodeJS.ErrnoException | undefined)?.code;
}

function systemPath(error: unknown): string {
  return (error as NodeJS.ErrnoException | undefined)?.path ?? "inside the program";
}
