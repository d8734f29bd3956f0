import { createHash } from "node:crypto";
import { appendFileSync, existsSync, readFileSync } from "node:fs";

/** Results on disk, a line of JSON each, so that a long measurement may be broken off and taken up again. */
export class KeptLines<Result extends object> {
  readonly #file: string | undefined;
  /** SHA-256 of the bundled program: what another state of the code measured is void. */
  readonly #program: string;
  readonly #lines: (Result & { readonly program: string })[];

  /**
   * @param programFile - the bundle that measures
   * @param revive - as of `JSON.parse`, where results hold what JSON does not
   */
  constructor(
    file: string | undefined,
    programFile: string,
    revive?: (name: string, value: unknown) => unknown,
  ) {
    this.#file = file;
    this.#program = createHash("sha256").update(readFileSync(programFile)).digest("hex");
    const text = file === undefined || !existsSync(file) ? "" : readFileSync(file, "utf8");
    this.#lines = text
      .split("\n")
      .filter((line) => line !== "")
      .map((line) => JSON.parse(line, revive));
  }

  /** What this very program measured before; undefined where it did not. */
  find(isIt: (result: Result) => boolean): Result | undefined {
    return this.#lines.find((line) => line.program === this.#program && isIt(line));
  }

  keep(result: Result): void {
    if (this.#file === undefined) return;
    appendFileSync(this.#file, `${JSON.stringify({ ...result, program: this.#program })}\n`);
  }
}

/** JSON has no NaN and writes null: for results in which nothing is null otherwise. */
export function nullIsNaN(_: string, value: unknown): unknown {
  return value === null ? Number.NaN : value;
}
