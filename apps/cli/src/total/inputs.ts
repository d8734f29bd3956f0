import { statSync } from "node:fs";
import path from "node:path";
import {
  arePartsOfOne,
  dopplerCuts,
  dropResent,
  groupIntoRounds,
  InputError,
  midEpochMs,
  type RadarSite,
  type SweepHeader,
  type Volume,
} from "@rainreckon/core";
import { formatsReady, sha256OfFile } from "@rainreckon/formats";
import { geodesicInverse } from "@rainreckon/mosaic";
import { sha256Hex } from "../digest.ts";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";
import type { PlanRadar } from "../plan/schema.ts";
import { joinChunks, openScans, type ScanPaths } from "../scans/scan-files.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { counted, countText } from "../ui/numbers.ts";
import type { Progress } from "../ui/progress.ts";
import { shortWaveReason } from "./short-wave.ts";

/** Two sites this far apart cannot be the same radar, whatever their id says. */
const SAME_SITE_M = 2000;

/** One file, hashed. `name` is relative to the plan's folder, with forward slashes. */
export interface HashedFile {
  readonly path: string;
  readonly name: string;
  readonly sha256: string;
  readonly bytes: number;
}

export async function hashFile(folder: string, file: string): Promise<HashedFile> {
  const name = path.relative(folder, file).split(path.sep).join("/");
  try {
    return { path: file, name, sha256: await sha256OfFile(file), bytes: statSync(file).size };
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    throw new InputError("cannot be read", name, "check that it is there and its permissions", { cause });
  }
}

interface ScanUse {
  readonly file: HashedFile;
  used: number;
  readonly reasons: string[];
}

/** A sweep of a radar that takes part in the run, with where it lies. */
export interface IndexedSweep extends ScanPaths {
  readonly header: SweepHeader;
  readonly file: HashedFile;
  /** Index among the headers of its file. */
  readonly index: number;
  readonly contentHash: string;
}

/** The rounds of one radar of the plan, in time order, and its median round. */
export interface RadarInput {
  readonly radar: PlanRadar;
  readonly sweeps: readonly IndexedSweep[];
  readonly rounds: readonly Volume[];
  /** How many of the rounds can reach into the window: those inside it, and within the longest gap of it. */
  readonly roundsInReach: number;
  readonly sweepOf: ReadonlyMap<SweepHeader, IndexedSweep>;
  readonly beamWidthDeg: number;
}

/** Beam width that is taken where neither file nor plan gives one: the usual one of weather radars; common practice. */
export const DEFAULT_BEAM_WIDTH_DEG = 1;

/**
 * Opens every scan file for its headers, and sorts its sweeps by radar and round.
 *
 * A file that cannot be read is left out and named; what is sent twice counts once.
 *
 * @param seen - is told what became of each file
 * @returns nothing where the plan names no scan, or none is usable and it has gridded rain besides
 * @throws InputError (no-input) when nothing usable is left
 */
export async function indexScans(
  loaded: LoadedPlan,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
  progress: Progress,
): Promise<RadarInput[]> {
  await formatsReady();
  const bySite = new Map<string, IndexedSweep[]>();
  const uses = new Map<string, ScanUse>();
  const contents = new Map<string, string>();
  const byPath = new Map<string, HashedFile>();
  /** All chunks of a volume, by the name of the one that stands for it. */
  const chunksOf = new Map<string, readonly HashedFile[]>();
  const places = new Map(
    loaded.plan.radars.flatMap(({ id, site }) => (site === undefined ? [] : [[id, site] as const])),
  );
  for (const scan of loaded.scanFiles) {
    progress.advance();
    let file: HashedFile;
    try {
      file = await hashFile(loaded.folder, scan);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      log.add("scan left out", error);
      continue;
    }
    const twin = contents.get(file.sha256);
    if (twin !== undefined) {
      log.add("scan left out", {
        what: `same bytes as ${twin}`,
        where: file.name,
        fix: "nothing to do: it counts once",
      });
      seen({ ...manifestFile(file), use: "duplicate", reason: `same bytes as ${twin}` });
      continue;
    }
    contents.set(file.sha256, file.name);
    uses.set(file.name, { file, used: 0, reasons: [] });
    byPath.set(scan, file);
  }
  const named = (where: string) => {
    for (const [scan, file] of byPath) if (where.includes(scan)) return where.replace(scan, () => file.name);
    return where;
  };
  const volumes = joinChunks([...byPath.keys()], { places }, (notice) =>
    log.add("chunks", { ...notice, where: named(notice.where) }),
  );
  for (const volume of volumes) {
    const own = (volume.chunks ?? [volume.path]).map((scan) => byPath.get(scan) as HashedFile);
    const tell = (reason: string) => {
      for (const { name } of own) uses.get(name)?.reasons.push(reason);
    };
    try {
      const opened = openScans(volume, { places });
      try {
        for (const remark of opened.remarks) log.add("assumed", { ...remark, where: named(remark.where) });
        for (const fault of opened.leftOut) {
          log.add("sweep left out", { what: fault.what, where: named(fault.where), fix: fault.fix });
          tell(fault.what);
        }
        for (const [index, header] of opened.headers.entries()) {
          const sweeps = bySite.get(header.site.id) ?? [];
          bySite.set(header.site.id, sweeps);
          const file = byPath.get(header.origin.path) ?? own[0];
          const contentHash =
            volume.chunks === undefined ? file.sha256 : sha256Hex(own.map(({ sha256 }) => sha256).join());
          sweeps.push({ header, file, index, contentHash, ...volume });
          if (volume.chunks !== undefined) chunksOf.set(file.name, own);
        }
      } finally {
        opened.close();
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      log.add("scan left out", { what: error.what, where: named(error.where), fix: error.fix });
      tell(error.what);
    }
  }
  const inputs = loaded.plan.radars
    .filter((radar) => radar.use)
    .map((radar) => radarInput(radar, bySite.get(radar.id) ?? [], loaded, log, uses))
    .filter((input) => input !== undefined);
  for (const [id, sweeps] of bySite) {
    const planned = loaded.plan.radars.find((radar) => radar.id === id);
    if (planned?.use) continue;
    const why = planned === undefined ? "is not in the plan" : "is switched off in the plan";
    if (planned === undefined) {
      log.add("radar left out", {
        what: `radar "${id}" ${why} (${counted(sweeps.length, "sweep")})`,
        where: sweeps[0].file.name,
        fix: "run plan --update to add it",
      });
    }
    for (const { file } of sweeps) uses.get(file.name)?.reasons.push(`radar ${id} ${why}`);
  }
  for (const [name, chunks] of chunksOf) {
    for (const chunk of chunks) {
      if (chunk.name !== name) (uses.get(chunk.name) as ScanUse).used += uses.get(name)?.used ?? 0;
    }
  }
  for (const { file, used, reasons } of uses.values()) {
    const use = used > 0 ? "used" : "left out";
    const reason = reasons.length > 0 ? { reason: [...new Set(reasons)].join("; ") } : {};
    seen({ ...manifestFile(file), use, ...reason });
  }
  if (inputs.length === 0 && !loaded.plan.grids.some(({ use }) => use)) {
    throw new InputError(
      "no usable scan is left",
      `${loaded.scanFiles.length} files under ${loaded.plan.scans.join(", ")}`,
      "see the lines above, or run survey on the folder",
      { kind: "no-input" },
    );
  }
  return inputs;
}

function manifestFile(file: HashedFile): { path: string; kind: string; sha256: string; bytes: number } {
  return { path: file.name, kind: "scan", sha256: file.sha256, bytes: file.bytes };
}

function radarInput(
  radar: PlanRadar,
  found: readonly IndexedSweep[],
  loaded: LoadedPlan,
  log: LeftOutLog,
  uses: ReadonlyMap<string, { file: HashedFile; used: number; reasons: string[] }>,
): RadarInput | undefined {
  if (found.length === 0) {
    log.add("radar without scans", {
      what: `no scan of radar "${radar.id}" was found`,
      where: "plan, radars",
      fix: "check its id with survey, or set use: false",
    });
    return undefined;
  }
  const leaveOut = (sweep: IndexedSweep, what: string, fix: string) => {
    log.add("sweep left out", { what, where: `${sweep.file.name}, ${sweep.header.origin.dataset}`, fix });
    uses.get(sweep.file.name)?.reasons.push(what);
  };
  const home = homeOf(found);
  const atHome = found.filter((sweep) => {
    const away = geodesicInverse(home, sweep.header.site).distanceM;
    if (away <= SAME_SITE_M) return true;
    leaveOut(
      sweep,
      `radar id "${radar.id}" stands ${(away / 1000).toFixed(1)} km from where most of its sweeps have it: two sites with one id`,
      "keep the files of one site in this run",
    );
    return false;
  });
  const parts = partsWith(radar.moment, atHome);
  const withMoment = atHome.filter((sweep) => {
    const offers = sweep.header.quantities;
    if (offers.includes(radar.moment)) return true;
    const rest = parts.of(sweep);
    if (rest !== undefined) {
      // One moment a file, or other gates for velocity: this sweep does take part, by its other part.
      uses.get(sweep.file.name)?.reasons.push(`the ${radar.moment} of this sweep is in ${rest.file.name}`);
      return false;
    }
    const unfiltered =
      offers.includes("TH") && radar.moment === "DBZH" ? "; TH is there (unfiltered): set moment: TH" : "";
    leaveOut(
      sweep,
      `no ${radar.moment}; the sweep offers ${offers.join(", ") || "no moment at all"}${unfiltered}`,
      `set moment of radar ${radar.id} in the plan`,
    );
    return false;
  });
  tellRemarks(radar, withMoment, log);
  if (refuseShortWave(radar, withMoment, log, uses)) return undefined;
  const { kept: sent, dropped } = dropResent(withMoment, loaded.plan.rain.resent);
  for (const { item, keptInstead, reason, content } of dropped) {
    leaveOut(
      item,
      // Under the name that people see: a path of this machine would make other bytes on the next.
      reason.replace(keptInstead.header.origin.path, () => keptInstead.file.name),
      content === "different" ? "see rain.resent in the plan" : "nothing to do: it counts once",
    );
  }
  const kept = withoutDopplerCuts(radar, sent, log, uses);
  const reachMs = Math.max(radar.maxGapMinutes, radar.medianRoundMinutes / 2) * 60_000;
  const from = Date.parse(loaded.plan.window.from) - reachMs;
  const to = Date.parse(loaded.plan.window.to) + reachMs;
  const sweepOf = new Map(kept.map((sweep) => [sweep.header, sweep]));
  const rounds = groupIntoRounds(
    kept.map((sweep) => sweep.header),
    { maxSilenceMs: radar.medianRoundMinutes * 60_000 },
  );
  let inside = 0;
  let outside = 0;
  for (const { header, file } of kept) {
    const mid = midEpochMs(header);
    const entry = uses.get(file.name);
    if (mid < from || mid > to) {
      outside++;
      entry?.reasons.push("outside the window");
    } else {
      inside++;
      if (entry !== undefined) entry.used++;
    }
  }
  if (outside > 0) {
    log.add(
      "sweep outside the window",
      {
        what: `${outside === 1 ? "1 sweep lies" : `${countText(outside)} sweeps lie`} outside the window`,
        where: `radar ${radar.id}`,
        fix: "nothing to do, or widen the window in the plan",
      },
      outside,
    );
  }
  if (inside === 0) return undefined;
  const roundsInReach = rounds.filter(({ sweeps }) =>
    sweeps.some((sweep) => midEpochMs(sweep) >= from && midEpochMs(sweep) <= to),
  ).length;
  return {
    radar,
    sweeps: kept,
    rounds,
    roundsInReach,
    sweepOf,
    beamWidthDeg: beamWidth(radar, home.id, kept, log),
  };
}

/** Where most sweeps have the radar; of places with as many, the one met first. */
function homeOf(sweeps: readonly IndexedSweep[]): RadarSite {
  const places = new Map<string, { site: RadarSite; count: number }>();
  for (const { header } of sweeps) {
    const key = `${header.site.lonDeg},${header.site.latDeg}`;
    const place = places.get(key) ?? { site: header.site, count: 0 };
    place.count++;
    places.set(key, place);
  }
  return [...places.values()].reduce((home, place) => (place.count > home.count ? place : home)).site;
}

/** Leaves out a radar whose waves rain takes up, unless the plan takes it all the same. */
function refuseShortWave(
  radar: PlanRadar,
  sweeps: readonly IndexedSweep[],
  log: LeftOutLog,
  uses: ReadonlyMap<string, { reasons: string[] }>,
): boolean {
  const wavelengthM =
    radar.wavelengthCm === undefined ? sweeps[0]?.header.wavelengthM : radar.wavelengthCm / 100;
  const reason = wavelengthM === undefined ? undefined : shortWaveReason(wavelengthM);
  if (reason === undefined || radar.acceptShortWavelength) return false;
  log.add("radar left out", {
    what: reason,
    where: `radar ${radar.id}`,
    fix: "leave it out with use: false, or write acceptShortWavelength: true for this radar in the plan",
  });
  for (const { file } of sweeps) uses.get(file.name)?.reasons.push("unfit for totals: short wavelength");
  return true;
}

/** What the readers had to assume of a radar's sweeps, each remark once with the number of its sweeps. */
function tellRemarks(radar: PlanRadar, sweeps: readonly IndexedSweep[], log: LeftOutLog): void {
  const counts = new Map<string, number>();
  for (const remark of sweeps.flatMap(({ header }) => header.remarks))
    counts.set(remark, (counts.get(remark) ?? 0) + 1);
  for (const [remark, count] of counts) {
    log.add("assumed", {
      what: `${remark.replace(/\.$/, "")} (${counted(count, "sweep")})`,
      where: `radar ${radar.id}`,
      fix: "nothing to do, if that is right",
    });
  }
}

/** The beam width to work with: the plan's, else the files', else a named default; and the band, for a warning. */
function beamWidth(radar: PlanRadar, id: string, sweeps: readonly IndexedSweep[], log: LeftOutLog): number {
  const header = sweeps[0]?.header;
  const wavelengthM = radar.wavelengthCm === undefined ? header?.wavelengthM : radar.wavelengthCm / 100;
  if (wavelengthM === undefined) {
    log.add("assumed", {
      what: "no wavelength in file or plan: attenuation at short wavelengths cannot be judged",
      where: `radar ${id}`,
      fix: "set wavelengthCm in the plan",
    });
  } else {
    const reason = shortWaveReason(wavelengthM);
    if (reason !== undefined) {
      log.add("doubted", {
        what: `${reason}; the plan takes it all the same`,
        where: `radar ${id}`,
        fix: "set acceptShortWavelength: false or use: false for this radar",
      });
    }
  }
  const fromFile = header?.beamWidthDeg?.horizontal;
  if (radar.beamWidthDeg === undefined && fromFile === undefined) {
    log.add("assumed", {
      what: `no beam width in file or plan: ${DEFAULT_BEAM_WIDTH_DEG} degree is taken`,
      where: `radar ${id}`,
      fix: "set beamWidthDeg in the plan",
    });
  }
  return radar.beamWidthDeg ?? fromFile ?? DEFAULT_BEAM_WIDTH_DEG;
}

/** Finds, for a sweep without a moment, the part of the same sweep that has it. */
function partsWith(
  moment: string,
  sweeps: readonly IndexedSweep[],
): { of(sweep: IndexedSweep): IndexedSweep | undefined } {
  const byStart = new Map<number, IndexedSweep[]>();
  for (const sweep of sweeps) {
    if (!sweep.header.quantities.includes(moment)) continue;
    const { startEpochMs } = sweep.header;
    byStart.set(startEpochMs, [...(byStart.get(startEpochMs) ?? []), sweep]);
  }
  return {
    of: ({ header }) =>
      byStart.get(header.startEpochMs)?.find((other) => arePartsOfOne(header, other.header)),
  };
}

/** Of a split cut, rain is taken from the surveillance cut alone; how many Doppler cuts that leaves aside is said. */
function withoutDopplerCuts(
  radar: PlanRadar,
  sweeps: readonly IndexedSweep[],
  log: LeftOutLog,
  uses: ReadonlyMap<string, { reasons: string[] }>,
): readonly IndexedSweep[] {
  const doppler = dopplerCuts(sweeps.map(({ header }) => header));
  if (doppler.size === 0) return sweeps;
  log.add("assumed", {
    what: `${counted(doppler.size, "Doppler cut")} at the elevation of the surveillance cut before: rain is taken from that`,
    where: `radar ${radar.id}`,
    fix: "nothing to do",
  });
  for (const { header, file } of sweeps) {
    if (doppler.has(header)) uses.get(file.name)?.reasons.push("a Doppler cut beside its surveillance cut");
  }
  return sweeps.filter(({ header }) => !doppler.has(header));
}
