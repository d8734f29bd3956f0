import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { expect, test } from "vitest";
import { GAUGES } from "./gauges.ts";
import * as storm from "./index.ts";

const readme = readFileSync(new URL("../../README.md", import.meta.url), "utf8");

test("the README's example prints what it says it prints", async () => {
  const example = /```ts\n(.*?)```/s.exec(readme)?.[1] ?? "";
  const promised = [...example.matchAll(/^console\.log.*; \/\/ (.*)$/gm)].map(([, line]) => line);
  expect(promised).toHaveLength(1);

  const folder = mkdtempSync(join(tmpdir(), "storm-readme-"));
  try {
    // The example is plain JavaScript but for its import; the folder it names becomes a passing one.
    const body = example
      .replace(/^import (\{.*\}) from "@rainreckon\/test-data\/storm";$/m, "const $1 = storm;")
      .replace('"storm"', JSON.stringify(join(folder, "storm")));
    const printed: string[] = [];
    const run = new Function("storm", "console", `return (async () => { ${body} })();`);
    await run(storm, { log: (line: string) => printed.push(line) });
    expect(printed).toEqual(promised);
  } finally {
    rmSync(folder, { recursive: true });
  }
});

test("the README names every planted fault beside its gauge", () => {
  const faulty = GAUGES.filter(({ fault }) => fault !== undefined);
  expect(faulty).toHaveLength(9);
  for (const { network, id, fault } of faulty) {
    expect(readme).toMatch(new RegExp(`\\| ${network} \`${id}\` +\\| \`${fault}\``));
  }
});
