import { createHash } from "node:crypto";
import { existsSync, mkdirSync, statfsSync } from "node:fs";
import path from "node:path";
import { arealDepth } from "@rainreckon/accumulation";
import { drawMember } from "@rainreckon/adjustment";
import { InputError, type Interval } from "@rainreckon/core";
import { type CsvColumn, createTotalsFile, type TotalsVariable, writeCsv } from "@rainreckon/formats";
import { uniformStream } from "@rainreckon/verification";
import { isoUtc } from "../ui/numbers.ts";
import type { Progress } from "../ui/progress.ts";
import { version } from "../version.ts";
import { adjustedIntervals, adjusterOf } from "./adjust.ts";
import { lonLatOf, type OutputSources } from "./outputs.ts";
import type { PreparedRun } from "./prepare.ts";
import type { KnownUncertainty } from "./uncertainty.ts";
import { uncertaintyWords } from "./uncertainty-words.ts";

/** Folder of the members in a run, and their series by catchment. */
export const MEMBERS_FOLDER = "members";
export const MEMBERS_TABLE = "members_catchments.csv";

/** Bytes of a cell: float32 for each interval, float64 for its longitude and latitude. */
const BYTES_PER_DEPTH = 4;
const BYTES_PER_PLACE = 16;
/** Headers and coordinates of a file, about. */
const BYTES_PER_FILE = 50_000;

const MEMBER_DEPTH: TotalsVariable = {
  name: "member_depth",
  over: "intervals",
  longName: "depth of precipitation that may be the true one, by interval",
  units: "mm",
  standardName: "lwe_thickness_of_precipitation_amount",
  cellMethods: "area: mean time: sum",
};

/** Name of a member's file in the run's folder; members count from 1. */
export function memberFile(member: number, count: number): string {
  const digits = Math.max(3, String(count).length);
  return `${MEMBERS_FOLDER}/member_${String(member).padStart(digits, "0")}.nc`;
}

/** The most that members take on disk, bytes. */
export function memberBytes({ grid, intervals }: PreparedRun, count: number): number {
  const cells = grid.nx * grid.ny;
  return count * (cells * (intervals.length * BYTES_PER_DEPTH + BYTES_PER_PLACE) + BYTES_PER_FILE);
}

/** Bytes that are free where a folder is or will be; undefined where the system does not say. */
export function freeBytes(folder: string): number | undefined {
  let there = path.resolve(folder);
  while (!existsSync(there) && path.dirname(there) !== there) there = path.dirname(there);
  try {
    const { bavail, bsize } = statfsSync(there);
    return bavail * bsize;
  } catch {
    return undefined;
  }
}

/** @throws InputError (usage) where members would not fit beside what the disk holds */
export function refuseMembersBeyondDisk(run: PreparedRun, count: number, folder: string): void {
  const free = freeBytes(folder);
  const needed = memberBytes(run, count);
  if (free === undefined || needed <= free) return;
  throw new InputError(
    `${count} members take up to ${megabytes(needed)} MB, and ${megabytes(free)} MB are free`,
    folder,
    "ask for fewer --members, choose another --out, or add --despite-space if you know better",
    { kind: "usage" },
  );
}

export function megabytes(bytes: number): number {
  return Math.ceil(bytes / 1e6);
}

interface MemberRow extends Interval {
  readonly member: number;
  readonly catchment: PreparedRun["catchments"][number];
  readonly depthMm: number;
}

/**
 * Writes members one at a time, and their depths by catchment. A member hangs on the run's digest and its own number
 * alone: the first of ten is the first of a hundred.
 *
 * @returns the files written
 */
export async function writeMembers(
  sources: OutputSources,
  uncertainty: KnownUncertainty,
  count: number,
  progress: Progress,
): Promise<string[]> {
  const files: string[] = [];
  const estimates = estimatedIntervals(sources);
  mkdirSync(sources.draft(MEMBERS_FOLDER), { recursive: true });
  async function* rows(): AsyncGenerator<MemberRow> {
    for (let member = 1; member <= count; member++) {
      const file = memberFile(member, count);
      yield* await writeMember(sources, uncertainty, estimates(), member, sources.draft(file));
      files.push(file);
      progress.advance();
    }
  }
  const columns: CsvColumn<MemberRow>[] = [
    { kind: "number", name: "member", decimals: 0, of: ({ member }) => member },
    { kind: "text", name: "catchment_id", of: ({ catchment }) => catchment.id },
    { kind: "text", name: "start", of: ({ startEpochMs }) => isoUtc(startEpochMs) },
    { kind: "text", name: "end", of: ({ endEpochMs }) => isoUtc(endEpochMs) },
    { kind: "number", name: "depth_mm", decimals: 3, of: ({ depthMm }) => depthMm },
  ];
  await writeCsv(sources.draft(MEMBERS_TABLE), columns, rows());
  return [...files, MEMBERS_TABLE];
}

/** One member: its file, and its rows. */
async function writeMember(
  sources: OutputSources,
  uncertainty: KnownUncertainty,
  estimates: Iterable<Float32Array>,
  number: number,
  file: string,
): Promise<MemberRow[]> {
  const { run, total } = sources;
  const member = drawMember({
    grid: run.grid,
    ...uncertainty,
    uniform: uniformStream(seedOf(run.runDigest, number)),
  });
  const output = await createTotalsFile(file, {
    grid: run.grid,
    projString: run.map.projString,
    lonLat: lonLatOf(run),
    title: run.loaded.plan.title,
    cautions: sources.cautions,
    window: run.window,
    intervals: run.intervals,
    radarIds: [],
    variables: [MEMBER_DEPTH],
    attributes: {
      source: `weather radar, rainreckon ${version()}`,
      status: run.loaded.plan.status,
      run_digest: run.runDigest,
      member: number,
      uncertainty: uncertaintyWords(uncertainty).join(" "),
    },
  });
  const rows: MemberRow[] = [];
  try {
    let k = 0;
    for (const estimate of estimates) {
      const interval = run.intervals[k];
      const { startEpochMs, endEpochMs } = interval;
      const depthMm = member.next(estimate, (endEpochMs - startEpochMs) / 3_600_000);
      output.writeInterval(MEMBER_DEPTH.name, k++, depthMm);
      const field = { depthMm, observedMs: total.sum.observedMs, cappedMm: total.sum.cappedMm };
      for (const catchment of run.catchments) {
        const areal = arealDepth(catchment.cells, field, run.window.endEpochMs - run.window.startEpochMs);
        rows.push({ startEpochMs, endEpochMs, member: number, catchment, depthMm: areal.depthMm });
      }
    }
  } catch (error) {
    output.abandon();
    throw error;
  }
  output.close();
  return rows;
}

/** The depths to use, interval by interval, as often as asked for: adjusted where there is an adjustment. */
function estimatedIntervals({ run, total, comparison, store }: OutputSources): () => Generator<Float32Array> {
  const { adjustment } = comparison;
  if (adjustment.applied) {
    const adjuster = adjusterOf(run, total, adjustment);
    return () => adjustedIntervals(run, total, adjustment, store, adjuster);
  }
  return function* () {
    for (const job of run.jobs) for (const { depthMm } of store.load(job).intervals) yield depthMm;
  };
}

/** A seed of 48 bits from what a run is made of. */
function seedOf(runDigest: string, member: number): number {
  const digest = createHash("sha256").update(`${runDigest} member ${member}`).digest("hex");
  return Number.parseInt(digest.slice(0, 12), 16);
}
