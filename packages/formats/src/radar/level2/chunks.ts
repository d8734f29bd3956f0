import { InputError } from "@rainreckon/core";
import { HEAD_BYTES, readHead } from "../../hdf5/index.ts";
import type { ScanFile, ScanOptions } from "../scan-file.ts";
import { sourcedScan } from "../sourced-scan.ts";
import { LEVEL2_NAME, readRaw } from "./level2-file.ts";
import type { Radial } from "./radial.ts";
import { startsRecord } from "./records.ts";
import { type RawVolume, volumeSweeps } from "./volume.ts";

/** Rays of one volume follow each other more closely than this. */
const LONGEST_SILENCE_MS = 120_000;

/** Whether a file is a later chunk of an Archive Level II volume in real time: records without a volume header. */
export function isScanChunk(path: string): boolean {
  return startsRecord(readHead(path, HEAD_BYTES));
}

/**
 * Joins the chunks that a volume was sent in while it was measured, in any order, so that turns of the antenna that
 * lie in several chunks come out whole.
 *
 * @param paths - the chunks of one volume; the first in time stands for all as the sweeps' origin
 * @throws InputError where chunks are of several radars or far apart in time, or one of them is damaged
 */
export function openScanChunks(paths: readonly string[], options: ScanOptions = {}): ScanFile {
  if (paths.length === 0) throw new RangeError("there is no chunk to join");
  const parts = paths.map((path) => ({ path, raw: readRaw(path) }));
  const stations = new Set(parts.map(({ raw }) => raw.station).filter((station) => station !== undefined));
  if (stations.size > 1) {
    throw new InputError(
      `chunks of several radars: ${[...stations].join(", ")}`,
      paths.join(", "),
      "join those of one",
    );
  }
  const withRays = parts
    .filter(({ raw }) => raw.radials.length > 0)
    .sort((a, b) => firstTime(a.raw) - firstTime(b.raw));
  const path = withRays[0]?.path ?? (paths[0] as string);
  mustFollow(withRays);
  const [station] = stations;
  const joined: RawVolume = {
    radials: withRays.flatMap(({ raw }) => raw.radials),
    ...(station === undefined ? {} : { station }),
    hasVolumeHeader: parts.some(({ raw }) => raw.hasVolumeHeader),
    brokenCount: parts.reduce((sum, { raw }) => sum + raw.brokenCount, 0),
    cutShort: parts.some(({ raw }) => raw.cutShort),
  };
  const { sweeps, remarks, leftOut } = volumeSweeps(path, joined, options);
  return sourcedScan(path, LEVEL2_NAME, sweeps, { remarks, leftOut }, () => undefined);
}

function mustFollow(parts: readonly { readonly path: string; readonly raw: RawVolume }[]): void {
  for (const [index, { path, raw }] of parts.slice(1).entries()) {
    const before = parts[index] as (typeof parts)[number];
    const silenceMs = firstTime(raw) - (before.raw.radials.at(-1) as Radial).epochMs;
    if (silenceMs <= LONGEST_SILENCE_MS) continue;
    const minutes = (silenceMs / 60_000).toFixed(1);
    throw new InputError(
      `it begins ${minutes} minutes after ${before.path} ends: a chunk is missing, or it is of another volume`,
      path,
      "join the chunks of one volume",
    );
  }
}

function firstTime(raw: RawVolume): number {
  return raw.radials[0]?.epochMs ?? Number.POSITIVE_INFINITY;
}
