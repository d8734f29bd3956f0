import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll } from "vitest";

/** A folder for the files of one test file, removed at its end. */
export function scratchFolder(): {
  write(name: string, content: string | Uint8Array): string;
  readonly path: string;
} {
  const path = mkdtempSync(join(tmpdir(), "rainreckon-formats-"));
  afterAll(() => rmSync(path, { recursive: true, force: true }));
  return {
    path,
    write(name, content) {
      const file = join(path, name);
      writeFileSync(file, content);
      return file;
    },
  };
}
