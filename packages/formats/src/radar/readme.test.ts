import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { afterAll, expect, test } from "vitest";
import { oneSweep, removeTemporary, writeOdim } from "../../test/odim-fixture.ts";
import * as gridded from "../gridded/index.ts";
import * as radar from "./index.ts";

afterAll(removeTemporary);

test("the README's example runs as it stands", async () => {
  const readme = readFileSync(new URL("../../README.md", import.meta.url), "utf8");
  const example = /## Radar scans[\s\S]*?```ts\n([\s\S]*?)```/.exec(readme)?.[1] ?? "";
  // The example is plain JavaScript but for its import, and reads a file that only stands for the reader's own.
  const script = example
    .replace(/import (\{.*?\}) from "@rainreckon\/formats";/, "const $1 = formats;")
    .replace('"scan.h5"', "path");
  const printed: string[] = [];
  const run = new Function("formats", "path", "console", `return (async () => {${script}})();`);
  await run(radar, writeOdim(oneSweep()), { log: (line: string) => printed.push(line) });
  expect(printed).toEqual(["zzone 0.5° DBZH", "8 rays, first to 22.5°"]);
});

test("the README's example of gridded rain runs as it stands", async () => {
  const readme = readFileSync(new URL("../../README.md", import.meta.url), "utf8");
  const example = /## Rain that is gridded already[\s\S]*?```ts\n([\s\S]*?)```/.exec(readme)?.[1] ?? "";
  const script = example
    .replace(/import (\{.*?\}) from "@rainreckon\/formats";/, "const $1 = formats;")
    .replace('"rate.tif"', "path");
  const printed: string[] = [];
  const run = new Function("formats", "path", "console", `return (async () => {${script}})();`);
  const path = fileURLToPath(new URL("../../test/fixtures/grid-rate.tif", import.meta.url));
  await run(gridded, path, { log: (line: string) => printed.push(line) });
  expect(printed).toEqual(["rainRateMmPerHour: 2 rows of 3, the first cell 0.5"]);
});
