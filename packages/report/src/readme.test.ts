import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import * as report from "./index.ts";

test("the README's example prints what it says it prints", () => {
  const readme = readFileSync(new URL("../README.md", import.meta.url), "utf8");
  const example = /```ts\n(.*?)```/s.exec(readme)?.[1] ?? "";
  const promised = [...example.matchAll(/^console\.log.*; \/\/ (.*)$/gm)].map(([, line]) => line);
  expect(promised.length).toBe(3);

  // The example is plain JavaScript but for its import, which becomes the same names of the same module.
  const body = example.replace(/^import (\{.*\}) from "@rainreckon\/report";$/m, "const $1 = report;");
  const printed: string[] = [];
  const run = new Function("report", "console", body);
  run(report, { log: (line: string) => printed.push(line) });
  expect(printed).toEqual(promised);
});
