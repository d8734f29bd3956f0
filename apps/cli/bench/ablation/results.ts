import { KeptLines, nullIsNaN } from "../shared/kept-lines.ts";
import type { Measured, Task } from "./measure.ts";
import type { WorldSize } from "./worlds.ts";

/** A line of a file of results. */
interface Line extends Measured {
  readonly size: WorldSize;
  /** As `Task.moments`, joined; empty for all. */
  readonly moments: string;
}

/** Results of the ablation on disk. */
export class ResultsFile {
  readonly #kept: KeptLines<Line>;

  /** @param programFile - the bundle that measures */
  constructor(file: string | undefined, programFile: string) {
    this.#kept = new KeptLines(file, programFile, nullIsNaN);
  }

  /** What this very program measured of a task before; undefined where it did not, or in other ways. */
  known({ world, seed, size, moments, variants }: Task): Measured | undefined {
    return this.#kept.find(
      (line) =>
        line.world === world &&
        line.seed === seed &&
        line.size === size &&
        line.moments === (moments ?? []).join() &&
        variants.every(({ name }) => line.scores.some((score) => score.name === name)),
    );
  }

  keep({ size, moments }: Task, measured: Measured): void {
    this.#kept.keep({ ...measured, size, moments: (moments ?? []).join() });
  }
}
