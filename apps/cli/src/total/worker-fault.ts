import { type FaultKind, InputError } from "@rainreckon/core";

/**
 * An error of a worker thread on its way to the program. Cloned as it is it would lose all but its message:
 * a full disk would be told as a fault of the program, without the place.
 */
export interface WorkerFault {
  readonly message: string;
  readonly stack: string | undefined;
  /** Of an error of the system. */
  readonly code: string | undefined;
  readonly path: string | undefined;
  /** Of an error that the user can mend. */
  readonly input: { what: string; where: string; fix: string; kind: FaultKind } | undefined;
}

/** What a worker sends back instead of throwing. */
export function faultOf(error: unknown): WorkerFault {
  if (!(error instanceof Error)) {
    return { message: String(error), stack: undefined, code: undefined, path: undefined, input: undefined };
  }
  const { message, stack, code, path } = error as NodeJS.ErrnoException;
  const input =
    error instanceof InputError
      ? { what: error.what, where: error.where, fix: error.fix, kind: error.kind }
      : undefined;
  return { message, stack, code, path, input };
}

/** The error again, with all that decides its words and the exit status. */
export function errorOf(fault: WorkerFault): Error {
  const { message, stack, code, path, input } = fault;
  const error =
    input === undefined
      ? new Error(message)
      : new InputError(input.what, input.where, input.fix, { kind: input.kind });
  if (stack !== undefined) error.stack = stack;
  return Object.assign(error, code === undefined ? {} : { code }, path === undefined ? {} : { path });
}
