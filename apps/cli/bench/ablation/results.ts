import { createHash } from "node:crypto";
import { appendFileSync, existsSync, readFileSync } from "node:fs";
import type { Measured, Task } from "./measure.ts";
import type { WorldSize } from "./worlds.ts";

/** A line of a file of results. */
interface Line extends Measured {
  readonly size: WorldSize;
  /** As `Task.moments`, joined; empty for all. */
  readonly moments: string;
  /** SHA-256 of the bundled program: what another state of the code measured is void. */
  readonly program: string;
}

/** Results on disk, a line each, so that a long measurement may be broken off and taken up again. */
export class ResultsFile {
  readonly #file: string | undefined;
  readonly #program: string;
  readonly #lines: Line[] = [];

  /** @param programFile - the bundle that measures */
  constructor(file: string | undefined, programFile: string) {
    this.#file = file;
    this.#program = createHash("sha256").update(readFileSync(programFile)).digest("hex");
    if (file === undefined || !existsSync(file)) return;
    for (const text of readFileSync(file, "utf8").split("\n")) {
      if (text !== "") this.#lines.push(JSON.parse(text, nullIsNaN) as Line);
    }
  }

  /** What this very program measured of a task before; undefined where it did not, or in other ways. */
  known({ world, seed, size, moments, variants }: Task): Measured | undefined {
    return this.#lines.find(
      (line) =>
        line.program === this.#program &&
        line.world === world &&
        line.seed === seed &&
        line.size === size &&
        line.moments === (moments ?? []).join() &&
        variants.every(({ name }) => line.scores.some((score) => score.name === name)),
    );
  }

  keep({ size, moments }: Task, measured: Measured): void {
    if (this.#file === undefined) return;
    const line: Line = { ...measured, size, moments: (moments ?? []).join(), program: this.#program };
    appendFileSync(this.#file, `${JSON.stringify(line)}\n`);
  }
}

/** JSON has no NaN and writes null; nothing in a result is null otherwise. */
function nullIsNaN(_: string, value: unknown): unknown {
  return value === null ? Number.NaN : value;
}
