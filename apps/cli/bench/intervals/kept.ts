import { createHash } from "node:crypto";
import { appendFileSync, existsSync, readFileSync } from "node:fs";
import type { Covered } from "./measure.ts";

/** Results on disk, a line each, so that a long measurement may be broken off and taken up again. */
export class KeptCoverage {
  readonly #file: string | undefined;
  /** SHA-256 of the bundled program: what another state of the code measured is void. */
  readonly #program: string;
  readonly #lines: (Covered & { readonly program: string })[];

  /** @param programFile - the bundle that measures */
  constructor(file: string | undefined, programFile: string) {
    this.#file = file;
    this.#program = createHash("sha256").update(readFileSync(programFile)).digest("hex");
    const text = file === undefined || !existsSync(file) ? "" : readFileSync(file, "utf8");
    this.#lines = text
      .split("\n")
      .filter((line) => line !== "")
      .map((line) => JSON.parse(line));
  }

  known(world: string, seed: number, method: string): Covered | undefined {
    return this.#lines.find(
      (line) =>
        line.program === this.#program &&
        line.world === world &&
        line.seed === seed &&
        line.method === method,
    );
  }

  keep(covered: Covered): void {
    if (this.#file === undefined) return;
    appendFileSync(this.#file, `${JSON.stringify({ ...covered, program: this.#program })}\n`);
  }
}
