import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import * as gauges from "./index.ts";

const folder = scratchFolder();

test("the README's example of a gauge file prints what it says it prints", async () => {
  const readme = readFileSync(new URL("../../README.md", import.meta.url), "utf8");
  const section = readme.slice(readme.indexOf("## Gauge and map files"));
  const table = /```csv\n(.*?)```/s.exec(section)?.[1] ?? "";
  const example = /```ts\n(.*?)```/s.exec(section)?.[1] ?? "";
  const promised = [...example.matchAll(/console\.log.* \/\/ (.*)$/gm)].map(([, line]) => line);
  expect(promised).toHaveLength(4);

  // Plain JavaScript but for its import, which becomes the same names of the same module.
  const body = example.replace(/^import (\{.*\}) from "@rainreckon\/formats";$/m, "const $1 = gauges;");
  const printed: string[] = [];
  const run = new Function("gauges", "path", "console", `return (async () => {${body}})();`);
  const log = (...values: unknown[]) => printed.push(values.map(String).join(" "));
  await run(gauges, folder.write("gauges.csv", table), { log });
  expect(printed).toEqual(promised);
});
