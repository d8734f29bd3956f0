import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { afterAll, expect, test } from "vitest";
import { resolveFiles } from "./resolve.ts";

const folder = mkdtempSync(path.join(os.tmpdir(), "rainreckon-resolve-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
mkdirSync(path.join(folder, "kept/deep (one)"), { recursive: true });
writeFileSync(path.join(folder, "kept/a.h5"), "");
writeFileSync(path.join(folder, "kept/deep (one)/b.h5"), "");
symlinkSync(path.join(folder, "kept"), path.join(folder, "link"));

async function found(...patterns: string[]): Promise<string[]> {
  const files = await resolveFiles(patterns, folder, () => undefined);
  return files.map((file) => path.relative(folder, file));
}

test("a link to a folder that the plan names is followed", async () => {
  expect(await found("link/*.h5")).toEqual(["link/a.h5"]);
  expect(await found(`${folder}/link/*.h5`)).toEqual(["link/a.h5"]);
  expect(await found("link/deep \\(one\\)/*.h5")).toEqual(["link/deep (one)/b.h5"]);
});

test("a link met while searching is not followed, so nothing counts twice", async () => {
  expect(await found("**/*.h5")).toEqual(["kept/a.h5", "kept/deep (one)/b.h5"]);
});

test("what matches nothing is told", async () => {
  const told: string[] = [];
  await resolveFiles(["nowhere/*.h5"], folder, ({ where }) => told.push(where));
  expect(told).toEqual(["nowhere/*.h5"]);
});
