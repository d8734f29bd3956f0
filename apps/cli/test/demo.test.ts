import { spawnSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { afterAll, beforeAll, expect, test } from "vitest";
import { ensureBuilt } from "./run-cli.ts";
import { ROOT } from "./sources.ts";

const folder = mkdtempSync(path.join(os.tmpdir(), "rainreckon-demo-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
beforeAll(() => {
  ensureBuilt();
  const built = spawnSync(process.execPath, [path.join(ROOT, "test-data/scripts/build.mjs")], {
    encoding: "utf8",
  });
  expect(built.status, built.stderr).toBe(0);
});

test("the demo prints what the README says it prints, and ends with the report and three commands", () => {
  const readme = readFileSync(path.join(ROOT, "README.md"), "utf8");
  const promised = /<!-- demo -->\n```\n([\s\S]*?)```/.exec(readme)?.[1] ?? "no block marked demo";
  const demo = path.join(ROOT, "apps/cli/scripts/demo.mjs");
  const { status, stdout, stderr } = spawnSync(process.execPath, [demo, folder], {
    encoding: "utf8",
    cwd: folder,
  });
  expect(status, stderr).toBe(0);
  expect(stdout).toContain(promised);
  expect(stdout).toMatch(/report: .*report\.html\n/);
  expect(stdout.match(/^ {2}npm run rainreckon -- /gm)).toHaveLength(3);
}, 180_000);
