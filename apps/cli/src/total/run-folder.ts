import { createHash } from "node:crypto";
import {
  existsSync,
  lstatSync,
  mkdirSync,
  readdirSync,
  readFileSync,
  renameSync,
  rmSync,
  writeFileSync,
} from "node:fs";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { manifestSchema } from "../manifest.ts";
import { lockFolder, refuseHeld } from "./run-lock.ts";

/** Where an unfinished run keeps its units and its outputs until all are whole. */
const UNFINISHED = ".unfinished";
const RUN_FILE = "run.json";
/** Written last: a folder that has it is finished. */
export const MANIFEST = "manifest.json";
/** The one file that may differ from run to run. */
export const RUN_LOG = "run-log.json";

/** Kind of the notice that members could not be drawn. */
export const MEMBERS_LEFT_OUT = "members left out";

/** Members of a run stand in a folder of their own, numbered from 1. */
const MEMBER_FILE = /^members\/member_\d+\.nc$/;

/** A run as a folder knows it: what it is made from, and how many members it has. */
export interface RunAsked {
  readonly runDigest: string;
  readonly members: number;
}

/** What a folder holds when a run comes to it. */
export type FolderState = "new" | "unfinished" | "finished";

/** The folder of a run. Outputs are made under `.unfinished` and moved into place when all are whole. */
export interface RunFolder {
  readonly state: FolderState;
  readonly folder: string;
  readonly unitsFolder: string;
  /** Under which what was learned is kept for a run that is taken up again. */
  readonly learnedFile: string;
  /** Where what was in the folder before went, under `force`. */
  readonly movedTo?: string;
  /** Path under which an output is made. */
  draft(file: string): string;
  /** Moves the drafts into place, the manifest last, and clears what was scratch. */
  publish(files: readonly string[]): void;
}

/**
 * Opens a folder for a run.
 *
 * A folder with an unfinished run of the same digest is resumed; a finished one of the same digest is left
 * as it is; anything else is refused, or moved aside under `force`. Nothing is ever deleted but scratch.
 *
 * @throws InputError (usage) where the folder holds something else, cannot be written, or another process works on it
 */
export function openRunFolder(folder: string, asked: RunAsked, force: boolean): RunFolder {
  const { runDigest } = asked;
  const state = stateOf(folder, asked);
  if (typeof state !== "string") {
    if (!force) throw state;
    refuseHeld(path.join(folder, UNFINISHED));
    const movedTo = moveAside(folder);
    return { ...openRunFolder(folder, asked, false), movedTo };
  }
  const scratch = path.join(folder, UNFINISHED);
  const run: RunFolder = {
    state,
    folder,
    unitsFolder: path.join(scratch, "units"),
    learnedFile: path.join(scratch, "learned"),
    draft: (file) => path.join(scratch, "out", file),
    publish(files) {
      const ordered = [...files.filter((file) => file !== MANIFEST), MANIFEST];
      for (const file of ordered) {
        makeFolder(path.dirname(path.join(folder, file)));
        renameSync(run.draft(file), path.join(folder, file));
      }
      rmSync(scratch, { recursive: true, force: true });
    },
  };
  if (state === "finished") return run;
  try {
    makeFolder(run.unitsFolder);
    makeFolder(path.join(scratch, "out"));
    lockFolder(scratch);
    writeFileSync(path.join(scratch, RUN_FILE), `${JSON.stringify({ runDigest })}\n`);
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    throw new InputError(
      "this folder cannot be written",
      folder,
      "choose another --out, or change its permissions",
      {
        kind: "usage",
        cause,
      },
    );
  }
  return run;
}

/** How much was left out, doubted or assumed by the finished run that a folder holds. */
export function noticeCountOf(folder: string): number {
  const { notices } = manifestSchema.parse(readJson(path.join(folder, MANIFEST)));
  return notices.reduce((sum, { count }) => sum + count, 0);
}

/** True where a folder holds a run that has not come to its end. */
export function isUnfinished(folder: string): boolean {
  return existsSync(path.join(folder, UNFINISHED)) && !existsSync(path.join(folder, MANIFEST));
}

function stateOf(folder: string, { runDigest, members }: RunAsked): FolderState | InputError {
  const stat = lstatSync(folder, { throwIfNoEntry: false });
  if (stat === undefined) return "new";
  const refuse = (what: string, fix: string) => new InputError(what, folder, fix, { kind: "usage" });
  if (!stat.isDirectory()) return refuse("the output is not a folder", "choose another --out");
  const names = readdirSync(folder);
  if (names.length === 0) return "new";
  const unfinished = path.join(folder, UNFINISHED);
  if (existsSync(path.join(folder, MANIFEST))) {
    const found = manifestSchema.safeParse(readJson(path.join(folder, MANIFEST)));
    if (!found.success || found.data.runDigest !== runDigest) {
      return refuse(
        "this folder holds another run",
        "choose another --out, or add --force to move the old run aside",
      );
    }
    const changed = found.data.outputs.find(
      ({ file, sha256 }) => file !== RUN_LOG && hashOf(outputPath(folder, file)) !== sha256,
    );
    if (changed !== undefined) {
      return refuse(
        `the run in this folder is the same, but its ${changed.file} was changed or removed since`,
        "add --force to move it aside and make it again",
      );
    }
    const there = found.data.outputs.filter(({ file }) => MEMBER_FILE.test(file)).length;
    // Where nothing tells of errors there are none, however many are asked for, and a notice says so.
    const refused = found.data.notices.some(({ kind }) => kind === MEMBERS_LEFT_OUT);
    if (members > 0 && there !== members && !refused) {
      return refuse(
        `the run in this folder is the same, but has ${there} members`,
        "choose another --out, or add --force to move it aside and make it again",
      );
    }
    return "finished";
  }
  if (lstatSync(unfinished, { throwIfNoEntry: false })?.isDirectory()) {
    const held = readJson(path.join(unfinished, RUN_FILE)) as { runDigest?: unknown } | undefined;
    if (held?.runDigest === runDigest) return "unfinished";
    return refuse(
      "this folder holds an unfinished run of another plan or other inputs",
      "choose another --out, or add --force to move it aside",
    );
  }
  return refuse(
    "this folder holds other files",
    "choose another --out, or add --force to move the whole folder aside",
  );
}

/** Where an output of a manifest lies: nowhere but in the run's own folder, whatever the manifest says. */
function outputPath(folder: string, file: string): string {
  return path.join(folder, MEMBER_FILE.test(file) ? file : path.basename(file));
}

/** Makes a folder and what lies above it. Node's own way to do so never ends where a file system refuses with ENOENT, as /proc does. */
function makeFolder(folder: string): void {
  if (existsSync(folder)) return;
  const above = path.dirname(folder);
  if (above !== folder) makeFolder(above);
  mkdirSync(folder);
}

/** Renames the folder to the first free name beside it: "out.before-1". */
function moveAside(folder: string): string {
  for (let n = 1; ; n++) {
    const aside = `${folder}.before-${n}`;
    if (existsSync(aside)) continue;
    renameSync(folder, aside);
    return aside;
  }
}

function readJson(file: string): unknown {
  try {
    return JSON.parse(readFileSync(file, "utf8"));
  } catch {
    return undefined;
  }
}

function hashOf(file: string): string | undefined {
  if (!lstatSync(file, { throwIfNoEntry: false })?.isFile()) return undefined;
  return createHash("sha256").update(readFileSync(file)).digest("hex");
}
