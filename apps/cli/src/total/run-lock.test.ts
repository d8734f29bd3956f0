import { spawn, spawnSync } from "node:child_process";
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { openRunFolder } from "./run-folder.ts";
import { lockFolder } from "./run-lock.ts";

const scratch = mkdtempSync(path.join(os.tmpdir(), "rainreckon-lock-"));
afterAll(() => rmSync(scratch, { recursive: true }));

const ASKED = { runDigest: "d".repeat(64), members: 0 };
const SINCE = "2031-06-01T12:00:00.000Z";

function emptyFolder(): string {
  return mkdtempSync(path.join(scratch, "run-"));
}

function held(folder: string, holder: unknown): void {
  writeFileSync(path.join(folder, "lock.json"), JSON.stringify(holder));
}

function fault(call: () => unknown): InputError {
  try {
    call();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

/** The number of a process that was, and is no more. */
function deadPid(): number {
  return spawnSync(process.execPath, ["-e", ""]).pid;
}

test("a folder on which another process works is refused, and named; forced or not", async () => {
  const other = spawn(process.execPath, ["-e", "setTimeout(() => {}, 60_000)"]);
  try {
    const folder = emptyFolder();
    openRunFolder(folder, ASKED, false);
    const lock = path.join(folder, ".unfinished", "lock.json");
    writeFileSync(lock, JSON.stringify({ pid: other.pid, host: os.hostname(), since: SINCE }));
    for (const [digest, force] of [
      [ASKED.runDigest, false],
      ["e".repeat(64), true],
    ] as const) {
      const error = fault(() => openRunFolder(folder, { ...ASKED, runDigest: digest }, force));
      expect(error.what).toBe(`process ${other.pid} on ${os.hostname()} works on this folder already`);
      expect(error.where).toBe(folder);
      expect(error.fix).toBe(`wait until it is done, or choose another --out; if it is gone, remove ${lock}`);
      expect(error.kind).toBe("usage");
    }
  } finally {
    other.kill();
  }
});

test.each([
  ["a process that is no more", () => ({ pid: deadPid(), host: os.hostname(), since: SINCE })],
  ["this very process", () => ({ pid: process.pid, host: os.hostname(), since: SINCE })],
  ["nobody, being damaged", () => "half a lo"],
])("a lock of %s is taken over", (_, holder) => {
  const folder = emptyFolder();
  held(folder, holder());
  lockFolder(folder);
  expect(JSON.parse(readFileSync(path.join(folder, "lock.json"), "utf8"))).toMatchObject({
    pid: process.pid,
  });
  expect(readdirSync(folder)).toEqual(["lock.json"]);
});

test("of a process of another machine nobody knows whether it is gone", () => {
  const folder = emptyFolder();
  held(folder, { pid: 1, host: "another-machine", since: SINCE });
  expect(fault(() => lockFolder(folder)).what).toBe(
    "process 1 on another-machine works on this folder already",
  );
});

test("a finished run leaves no lock", () => {
  const folder = emptyFolder();
  const run = openRunFolder(folder, ASKED, false);
  writeFileSync(run.draft("manifest.json"), "{}");
  run.publish(["manifest.json"]);
  expect(readdirSync(folder)).toEqual(["manifest.json"]);
});
