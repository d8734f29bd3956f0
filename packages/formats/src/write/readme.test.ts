import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { scratchFolder } from "../../test/foreign-tools.ts";
import * as write from "./index.ts";

test("the README's example of an output prints what it says it prints", async () => {
  const readme = readFileSync(new URL("../../README.md", import.meta.url), "utf8");
  const outputs = readme.slice(readme.indexOf("## Outputs"));
  const example = /```ts\n(.*?)```/s.exec(outputs)?.[1] ?? "";
  const promised = [...example.matchAll(/^console\.log.*; \/\/ (.*)$/gm)].map(([, line]) => line);
  expect(promised.length).toBeGreaterThan(0);

  // Plain JavaScript but for its import, which becomes the same names of the same module.
  const body = example.replace(/^import (\{.*\}) from "@rainreckon\/formats";$/m, "const $1 = write;");
  const printed: string[] = [];
  const run = new Function("write", "path", "console", `return (async () => {${body}})();`);
  const path = join(scratchFolder(), "totals.nc");
  await run(write, path, { log: (value: unknown) => printed.push(String(value)) });
  expect(printed).toEqual(promised);
  expect(readFileSync(path).subarray(1, 4).toString()).toBe("HDF");
});
