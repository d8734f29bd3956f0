/** Why something the user can mend went wrong: it decides the exit status, and nothing else does. */
export type FaultKind =
  /** One input is unusable; the rest of the job can go on. */
  | "input"
  /** Nothing usable is left to work with (exit 3). */
  | "no-input"
  /** Wrong usage or plan, output not writable, or a folder that holds another run (exit 2). */
  | "usage"
  /** Failed midway: disk full, say (exit 1). */
  | "midway";

/**
 * A fault that the user can mend: what is wrong, where (file, line, dataset), and what to do about it.
 *
 * Anything else that is thrown is a caller's mistake (`RangeError`) or a bug, and keeps its stack.
 */
export class InputError extends Error {
  override readonly name = "InputError";
  readonly what: string;
  readonly where: string;
  readonly fix: string;
  readonly kind: FaultKind;

  /** @param options - `kind` defaults to "input"; `cause` is the error that this one wraps */
  constructor(
    what: string,
    where: string,
    fix: string,
    options: { readonly kind?: FaultKind; readonly cause?: unknown } = {},
  ) {
    super(`${what} (${where})`, options.cause === undefined ? undefined : { cause: options.cause });
    this.what = what;
    this.where = where;
    this.fix = fix;
    this.kind = options.kind ?? "input";
  }

  /** The one-line form, for an input that is left out while the job goes on. */
  get line(): string {
    return `${this.where}: ${this.what}; ${this.fix}`;
  }
}

/** Something worth a person's attention that did not stop the work: same three parts as an error. */
export interface Notice {
  readonly what: string;
  readonly where: string;
  readonly fix: string;
}
