import { InputError, type Notice, type RadarSite } from "@rainreckon/core";
import type { ScanOptions } from "../scan-file.ts";
import type { SweepSource } from "../sourced-scan.ts";
import { cutSweeps } from "./cut-sweeps.ts";
import { type Cut, cutsOf } from "./cuts.ts";
import { radialOfMessage1 } from "./message1.ts";
import { radialOfMessage31 } from "./message31.ts";
import { messagesOf } from "./messages.ts";
import type { Radial } from "./radial.ts";
import type { Unpacked } from "./records.ts";

/** Rays of one file, and what was wrong with it. */
export interface RawVolume {
  readonly radials: readonly Radial[];
  readonly station?: string;
  readonly hasVolumeHeader: boolean;
  /** Messages of radar data that do not hold together. */
  readonly brokenCount: number;
  readonly cutShort: boolean;
}

/** The rays in the messages of a file, in its order. */
export function rawVolume({ records, station, hasVolumeHeader, cutShort: fileCut }: Unpacked): RawVolume {
  const radials: Radial[] = [];
  let brokenCount = 0;
  let cutShort = fileCut;
  for (const record of records) {
    const found = messagesOf(record);
    cutShort ||= found.cutShort;
    for (const { type, body } of found.messages) {
      if (type !== 1 && type !== 31) continue;
      const radial = type === 31 ? radialOfMessage31(body) : radialOfMessage1(body);
      if (radial === undefined) brokenCount++;
      else radials.push(radial);
    }
  }
  const named = station ?? radials.find((radial) => radial.station !== undefined)?.station;
  return {
    radials,
    ...(named === undefined ? {} : { station: named }),
    hasVolumeHeader,
    brokenCount,
    cutShort,
  };
}

/** What can be used of a volume. */
export interface VolumeSweeps {
  readonly sweeps: readonly SweepSource[];
  readonly remarks: readonly Notice[];
  readonly leftOut: readonly InputError[];
}

/** @throws InputError where there is no ray, no place of the radar, or no sweep that can be used */
export function volumeSweeps(path: string, raw: RawVolume, options: ScanOptions): VolumeSweeps {
  if (raw.radials.length === 0) {
    throw new InputError(
      "the file holds no radar data (message 1 or 31)",
      path,
      "leave it out, or fetch it again",
    );
  }
  const site = siteOf(path, raw, options);
  const sweeps: SweepSource[] = [];
  const leftOut: InputError[] = [];
  for (const cut of cutsOf(raw.radials)) {
    try {
      refusePartAlone(path, cut, raw);
      sweeps.push(...cutSweeps(path, cut, site));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      leftOut.push(error);
    }
  }
  if (sweeps.length === 0) throw leftOut[0];
  return { sweeps, remarks: remarksOf(path, raw), leftOut };
}

/** A part of a turn in a later chunk of a volume would pass for a turn of its own, at an instant of its own. */
function refusePartAlone(path: string, cut: Cut, { hasVolumeHeader }: RawVolume): void {
  if (hasVolumeHeader || cut.isWhole) return;
  throw new InputError(
    `a chunk of a volume, with only a part of this turn: ${cut.radials.length} rays`,
    `${path}, cut ${cut.elevationNumber}`,
    "write the chunks of the volume into one file, one after the other, from the first on",
  );
}

function remarksOf(path: string, { brokenCount, cutShort }: RawVolume): Notice[] {
  const remarks: Notice[] = [];
  if (cutShort) {
    const fix = "fetch it again, unless it is a volume still being sent";
    remarks.push({ what: "the file is cut short; what came before is read", where: path, fix });
  }
  if (brokenCount > 0) {
    const what = `${brokenCount} messages of radar data do not hold together and are left out`;
    remarks.push({ what, where: path, fix: "fetch the file again" });
  }
  return remarks;
}

function siteOf(path: string, { radials, station }: RawVolume, options: ScanOptions): RadarSite {
  const told = radials.find(({ place }) => place !== undefined)?.place;
  const id = station === undefined ? undefined : `ICAO-${station}`;
  const place = told ?? (id === undefined ? undefined : options.places?.get(id));
  if (place === undefined) {
    throw new InputError(
      `the file does not say where radar ${station ?? "(no name)"} stands, as all of its age`,
      path,
      `give longitude, latitude and antenna height of radar ${id ?? "of this file"} in the plan`,
    );
  }
  const possible =
    Math.abs(place.lonDeg) <= 180 &&
    Math.abs(place.latDeg) <= 90 &&
    place.antennaHeightM >= -500 &&
    place.antennaHeightM <= 9000;
  if (!possible) {
    throw new InputError(
      `the radar stands at ${place.latDeg}, ${place.lonDeg}, ${place.antennaHeightM} m`,
      path,
      "fetch the file again",
    );
  }
  const { lonDeg, latDeg, antennaHeightM } = place;
  return {
    id: id ?? `AT-${latDeg.toFixed(4)}-${lonDeg.toFixed(4)}`,
    ...(station === undefined ? {} : { name: station }),
    lonDeg,
    latDeg,
    antennaHeightM,
  };
}
