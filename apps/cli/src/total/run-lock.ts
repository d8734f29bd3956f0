import { existsSync, linkSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";

const LOCK = "lock.json";

/** Who works on a folder. */
interface Holder {
  readonly pid: number;
  readonly host: string;
  readonly since: string;
}

/**
 * Takes a folder for this process, so that no two write over each other. The lock of a process of this machine that is
 * no more is taken over. It goes with the folder it lies in; a process that ends leaves it behind.
 *
 * @param scratch - folder that the lock lies in
 * @throws InputError (usage) where another process holds it, or one of another machine may
 */
export function lockFolder(scratch: string): void {
  const lock = path.join(scratch, LOCK);
  const beside = path.join(scratch, `lock-${process.pid}.json`);
  const own: Holder = { pid: process.pid, host: os.hostname(), since: new Date().toISOString() };
  writeFileSync(beside, `${JSON.stringify(own)}\n`);
  try {
    // A second turn, since a stale lock is first put aside.
    if (linked(beside, lock)) return;
    refuseHeld(scratch);
    putAside(lock);
    if (!linked(beside, lock)) throw heldBy(holderOf(lock), lock);
  } finally {
    rmSync(beside, { force: true });
  }
}

/** Nothing that another process works on is moved away. @throws InputError as {@link lockFolder} */
export function refuseHeld(scratch: string): void {
  const lock = path.join(scratch, LOCK);
  const held = holderOf(lock);
  if (held !== undefined && isAtWork(held)) throw heldBy(held, lock);
}

/** A link comes into being whole, and only where there is none. */
function linked(from: string, to: string): boolean {
  try {
    linkSync(from, to);
    return true;
  } catch (error) {
    if (error instanceof Error && "code" in error && error.code === "EEXIST") return false;
    throw error;
  }
}

/** Removes a stale lock, unless another process has put its own in its place meanwhile. */
function putAside(lock: string): void {
  const aside = `${lock}.${process.pid}`;
  try {
    renameSync(lock, aside);
  } catch {
    // Another process was quicker; who holds it now is seen by the next look.
    return;
  }
  const moved = holderOf(aside);
  if (moved !== undefined && isAtWork(moved)) linked(aside, lock);
  rmSync(aside, { force: true });
}

function holderOf(file: string): Holder | undefined {
  if (!existsSync(file)) return undefined;
  try {
    const held = JSON.parse(readFileSync(file, "utf8")) as Holder;
    return typeof held.pid === "number" && typeof held.host === "string" ? held : undefined;
  } catch {
    return undefined;
  }
}

/** Of a process of another machine nobody can tell. */
function isAtWork({ pid, host }: Holder): boolean {
  if (host !== os.hostname()) return true;
  if (pid === process.pid) return false;
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    // Signal 0 is sent to nobody: it only asks. What may not be asked is there.
    return error instanceof Error && "code" in error && error.code === "EPERM";
  }
}

function heldBy(holder: Holder | undefined, lock: string): InputError {
  const who = holder === undefined ? "another process" : `process ${holder.pid} on ${holder.host}`;
  return new InputError(
    `${who} works on this folder already`,
    path.dirname(path.dirname(lock)),
    `wait until it is done, or choose another --out; if it is gone, remove ${lock}`,
    { kind: "usage" },
  );
}
