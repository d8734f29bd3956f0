import {
  bandOfWavelength,
  dopplerCuts,
  dropResent,
  groupIntoRounds,
  joinParts,
  medianRoundMs,
  type Notice,
  type SweepHeader,
  type Volume,
} from "@rainreckon/core";
import { geodesicInverse } from "@rainreckon/mosaic";
import { counted, decimals, isoUtc, lengthText, utcText } from "../ui/numbers.ts";
import type { RadarFinding } from "./findings.ts";

/** A silence longer than this ends a round, even where no elevation is seen again. */
export const MAX_SILENCE_MS = 10 * 60_000;
/** A hole is what is longer than so many median rounds: the same factor that plans start with. */
export const GAP_ROUNDS = 2.5;
/** Two antennas farther apart than this are not one radar, whatever their files say. */
const SAME_PLACE_M = 1000;
/** Shorter waves lose so much in rain that a total from them means nothing. */
const SHORTEST_USEFUL_M = 0.02;

/** A sweep as a survey sees it. */
export interface SeenSweep {
  readonly header: SweepHeader;
  /** SHA-256 of the file, where it had to be told from another. */
  readonly contentHash?: string;
  readonly format: string;
  /** Every file of its volume, where that came in chunks. */
  readonly chunks?: readonly string[];
}

export interface RadarFindings {
  readonly radars: readonly RadarFinding[];
  /** Rounds of each radar, by id: what `plan` needs besides. */
  readonly rounds: ReadonlyMap<string, readonly Volume[]>;
}

/** Sums up the sweeps of all sites; what is wrong with them goes to `onNotice`. */
export function radarFindings(
  sweeps: readonly SeenSweep[],
  onNotice: (notice: Notice) => void,
): RadarFindings {
  const bySite = new Map<string, SeenSweep[]>();
  for (const sweep of sweeps) {
    const { id } = sweep.header.site;
    const known = bySite.get(id);
    if (known === undefined) bySite.set(id, [sweep]);
    else known.push(sweep);
  }
  const radars: RadarFinding[] = [];
  const rounds = new Map<string, readonly Volume[]>();
  for (const id of [...bySite.keys()].sort()) {
    const { radar, volumes } = radarFinding(id, bySite.get(id)!, onNotice);
    radars.push(radar);
    rounds.set(id, volumes);
  }
  return { radars, rounds };
}

function radarFinding(id: string, sent: readonly SeenSweep[], onNotice: (notice: Notice) => void) {
  // The same rule as the plan's default, so that survey and total speak of the same sweeps.
  const { kept, dropped } = dropResent(sent, "last");
  const headers = joinParts(kept).map(({ header }) => header);
  const doppler = dopplerCuts(headers);
  const volumes = groupIntoRounds(
    headers.filter((header) => !doppler.has(header)),
    { maxSilenceMs: MAX_SILENCE_MS },
  );
  const medianMs = medianRoundMs(volumes);
  const first = headers[0]!;
  const wavelengthM = commonest(headers.map((header) => header.wavelengthM));
  const beamWidthDeg = commonest(headers.map((header) => header.beamWidthDeg?.vertical));
  const band = wavelengthM === undefined ? undefined : bandOfWavelength(wavelengthM)?.letter;
  const sizes = volumes.map((volume) => volume.sweeps.length);
  const quantities = countEach(headers.flatMap((header) => header.quantities));
  const { name } = first.site;
  const files = [...new Set(sent.flatMap(({ header, chunks }) => chunks ?? [header.origin.path]))].sort();
  const radar: RadarFinding = {
    id,
    ...(name === undefined ? {} : { name }),
    lonDeg: first.site.lonDeg,
    latDeg: first.site.latDeg,
    antennaHeightM: first.site.antennaHeightM,
    ...(wavelengthM === undefined ? {} : { wavelengthCm: Number((wavelengthM * 100).toFixed(3)) }),
    ...(band === undefined ? {} : { band }),
    ...(beamWidthDeg === undefined ? {} : { beamWidthDeg: Number(beamWidthDeg.toFixed(3)) }),
    fileCount: files.length,
    sweepCount: headers.length,
    roundCount: volumes.length,
    sweepsPerRound: { least: Math.min(...sizes), most: Math.max(...sizes) },
    medianRoundMinutes: medianMs === undefined ? null : minutes(medianMs),
    firstStart: isoUtc(Math.min(...headers.map((header) => header.startEpochMs))),
    lastEnd: isoUtc(Math.max(...headers.map((header) => header.endEpochMs))),
    gaps: gapsBetween(volumes, medianMs),
    quantities: [...quantities].map(([quantity, sweepCount]) => ({ name: quantity, sweepCount })),
    elevationsDeg: distinctElevations(headers),
    maxRangeKm: Number((Math.max(...headers.map(farEdgeM)) / 1000).toFixed(3)),
    resent: {
      sameFile: dropped.filter(({ content }) => content === "same").length,
      otherFile: dropped.filter(({ content }) => content !== "same").length,
    },
    formats: [...new Set(sent.map(({ format }) => format))].sort(),
    files,
  };
  tellFaults(radar, headers, onNotice);
  if (doppler.size > 0) {
    onNotice({
      what: `${counted(doppler.size, "Doppler cut")} at the elevation of the surveillance cut before; rain is taken from that`,
      where: `radar ${id}`,
      fix: "nothing to do",
    });
  }
  return { radar, volumes };
}

function tellFaults(
  radar: RadarFinding,
  headers: readonly SweepHeader[],
  onNotice: (notice: Notice) => void,
) {
  const where = `radar ${radar.id}`;
  const first = headers[0]!;
  const stray = strayFrom(first, headers);
  if (stray !== undefined) {
    const km = decimals(geodesicInverse(first.site, stray.site).distanceM / 1000, 1);
    onNotice({
      what: `two sites ${km} km apart carry this one id`,
      where: `${where}, ${first.origin.path} and ${stray.origin.path}`,
      fix: "make the totals of the two from separate folders, or give one another id in its files",
    });
  }
  const offered = radar.quantities.map((quantity) => quantity.name).join(", ") || "no moment at all";
  const withRain = radar.quantities.find((quantity) => quantity.name === "DBZH")?.sweepCount ?? 0;
  if (withRain < radar.sweepCount) {
    const fix = radar.quantities.some((quantity) => quantity.name === "TH")
      ? "write moment: TH in the plan if uncorrected reflectivity is to be used"
      : "name another moment in the plan, or leave these files out";
    onNotice({
      what: `${counted(radar.sweepCount - withRain, "sweep")} of ${radar.sweepCount} without DBZH; the files offer ${offered}`,
      where,
      fix,
    });
  }
  if (radar.beamWidthDeg === undefined) {
    onNotice({
      what: "the files give no beam width",
      where,
      fix: "check beamWidthDeg in the plan, which stands at its default",
    });
  }
  if (radar.wavelengthCm === undefined) {
    onNotice({
      what: "the files give no wavelength",
      where,
      fix: "write wavelengthCm in the plan where it is known",
    });
  } else if (radar.wavelengthCm < SHORTEST_USEFUL_M * 100) {
    onNotice({
      what: `at a wavelength of ${radar.wavelengthCm} cm (${radar.band ?? "no"} band) rain takes too much from the beam for a rain total`,
      where,
      fix: "leave this radar out",
    });
  }
  if (radar.resent.otherFile > 0) {
    onNotice({
      what: `${counted(radar.resent.otherFile, "sweep")} sent again with other content`,
      where,
      fix: "the plan's rain.resent says which one counts (default: the last by file name)",
    });
  }
  for (const gap of radar.gaps) {
    onNotice({
      what: `no sweep for ${lengthText(gap.minutes * 60_000)}, from ${utcText(Date.parse(gap.from))}`,
      where,
      fix: "add the missing files; else this time stays not observed",
    });
  }
  for (const [remark, count] of countEach(headers.flatMap((header) => header.remarks))) {
    onNotice({
      what: `${remark.replace(/\.$/, "")} (${counted(count, "sweep")})`,
      where,
      fix: "nothing to do, if that is right",
    });
  }
}

function gapsBetween(volumes: readonly Volume[], medianMs: number | undefined): RadarFinding["gaps"] {
  if (medianMs === undefined) return [];
  const gaps: RadarFinding["gaps"] = [];
  for (let index = 1; index < volumes.length; index += 1) {
    const from = Math.max(...volumes[index - 1]!.sweeps.map((sweep) => sweep.endEpochMs));
    const to = Math.min(...volumes[index]!.sweeps.map((sweep) => sweep.startEpochMs));
    if (to - from > GAP_ROUNDS * medianMs)
      gaps.push({ from: isoUtc(from), to: isoUtc(to), minutes: minutes(to - from) });
  }
  return gaps;
}

function farEdgeM(header: SweepHeader): number {
  return header.firstGateCentreM + (header.gateCount - 0.5) * header.gateLengthM;
}

function minutes(lengthMs: number): number {
  return Number((lengthMs / 60_000).toFixed(3));
}

/** Elevations that differ by more than a tenth of a degree, each by the first number that was met from below. */
function distinctElevations(headers: readonly SweepHeader[]): number[] {
  const distinct: number[] = [];
  for (const elevation of headers.map((header) => header.elevationDeg).sort((a, b) => a - b)) {
    if (distinct.length === 0 || elevation - distinct.at(-1)! > 0.1)
      distinct.push(Number(elevation.toFixed(2)));
  }
  return distinct;
}

function commonest(values: readonly (number | undefined)[]): number | undefined {
  const counts = countEach(values.filter((value) => value !== undefined));
  return [...counts].sort((a, b) => b[1] - a[1])[0]?.[0];
}

function countEach<T>(values: readonly T[]): Map<T, number> {
  const counts = new Map<T, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  return counts;
}

/** A sweep of another place than the first one's. */
function strayFrom(first: SweepHeader, headers: readonly SweepHeader[]): SweepHeader | undefined {
  // Nearly always all positions are the same numbers, and a geodesic is not free on 100,000 sweeps.
  return headers.find(
    ({ site }) =>
      (site.lonDeg !== first.site.lonDeg || site.latDeg !== first.site.latDeg) &&
      geodesicInverse(first.site, site).distanceM > SAME_PLACE_M,
  );
}
