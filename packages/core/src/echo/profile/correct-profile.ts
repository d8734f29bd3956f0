import { addEffect, markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type BeamSettings, type GateTable, gateHeights, gateTable, SHARE_STEPS } from "./gate-table.ts";
import { correctShareByRhohv } from "./layered-share.ts";
import type { LearnedProfile } from "./learned-profile.ts";

export interface ProfileSettings extends BeamSettings {
  /** Most that is added or taken. A gate that would need more added is not observed: little is left to scale up. */
  readonly largestCorrectionDb: number;
  /** Height above mean sea level to which echo is brought down. */
  readonly groundAslM: number;
}

/** House rules; 10 dB is snow 2.2 km above the melting layer. */
export const PROFILE_DEFAULTS: ProfileSettings = { largestCorrectionDb: 10, groundAslM: 0 };

/** Range bands of the report. */
export const PROFILE_BAND_M = 10_000;

/** What the profile did to one sweep. */
export interface ProfileReport {
  readonly basis: LearnedProfile["basis"];
  /** Shape [bands of {@link PROFILE_BAND_M}]: gates with echo that remain, and the dB added to them: the sum, and the largest either way. */
  readonly wetGates: Float64Array;
  readonly addedDb: Float64Array;
  readonly largestDb: Float64Array;
  /** Shape as above: gates that became not observed, wet or dry. */
  readonly lostGates: Float64Array;
  /** Gates with echo that carry a mark. */
  meltingGates: number;
  snowGates: number;
}

/**
 * Brings the echo of a sweep down to the ground by the vertical profile.
 *
 * Beam-averaged: dBZ at the ground = dBZ of the gate + P(ground) - P(beam) (Kitchen, Brown and Davies 1994,
 * Q. J. R. Meteorol. Soc. 120, 1231-1254; Joss and Lee 1995, J. Appl. Meteorol. 34, 2612-2630). Convective rain has
 * no such profile and keeps its value, but for the share that the run has taught; where RHOHV tells how much of a gate's echo is melting snow, that decides over
 * the rain type. What lies so high that it needs more than the limit is not observed, dry or wet and of either type,
 * so that no sample of rain alone remains.
 *
 * @param rainType - by gate, see `RAIN_TYPE`; undefined takes all rain for stratiform
 */
export function correctProfile(
  echo: PolarEcho,
  learned: LearnedProfile,
  rainType: Uint8Array | undefined,
  settings: ProfileSettings = PROFILE_DEFAULTS,
): ProfileReport {
  const { gateCount, rayCount, firstGateCentreM, gateLengthM } = echo.header;
  const band = Uint16Array.from({ length: gateCount }, (_, gate) =>
    Math.floor((firstGateCentreM + gate * gateLengthM) / PROFILE_BAND_M),
  );
  const perBand = () => new Float64Array((band[gateCount - 1] ?? 0) + 1);
  const report: ProfileReport = {
    basis: learned.basis,
    wetGates: perBand(),
    addedDb: perBand(),
    largestDb: perBand(),
    lostGates: perBand(),
    meltingGates: 0,
    snowGates: 0,
  };
  countWet(echo, band, report.wetGates);
  const table = tableOf(echo, learned, settings);
  if (table === undefined || table.firstTouched === gateCount) return report;

  const added = new Float32Array(echo.dbz.length);
  const share = new Float64Array(gateCount);
  for (let ray = 0; ray < rayCount; ray++) {
    const rayStart = ray * gateCount;
    shareOfRay(share, echo, learned, rainType, rayStart, table);
    correctRay(echo, rayStart, share, table, settings.largestCorrectionDb, band, added, report);
  }
  addEffect(echo, "profile", added);
  return report;
}

function countWet({ dbz }: PolarEcho, band: Uint16Array, wetGates: Float64Array): void {
  const gateCount = band.length;
  const wet = new Int32Array(gateCount);
  for (let start = 0; start < dbz.length; start += gateCount) {
    for (let gate = 0; gate < gateCount; gate++) {
      if ((dbz[start + gate] as number) > Number.NEGATIVE_INFINITY) (wet[gate] as number)++;
    }
  }
  for (let gate = 0; gate < gateCount; gate++) {
    (wetGates[band[gate] as number] as number) += wet[gate] as number;
  }
}

/**
 * Share of the rain that has the profile: all of stratiform, of convective as much as was measured, unless RHOHV knows
 * better. Where it was not measured convective rain has none of it, but within a melting layer stratiform echo passes
 * for convective by its strength, so that the type is worth half there; house rule.
 */
function shareOfRay(
  share: Float64Array,
  { rhohv }: PolarEcho,
  { layer, convectiveShare }: LearnedProfile,
  rainType: Uint8Array | undefined,
  rayStart: number,
  { firstTouched, meltingShare }: GateTable,
): void {
  for (let gate = firstTouched; gate < share.length; gate++) {
    const convective = rainType !== undefined && rainType[rayStart + gate] === RAIN_TYPE.convective;
    share[gate] = convective ? (convectiveShare ?? (meltingShare[gate] as number) / 2) : 1;
  }
  if (layer?.correlation === undefined || rhohv === undefined) return;
  correctShareByRhohv(share, rhohv, rayStart, firstTouched, meltingShare, layer.correlation);
}

function correctRay(
  { dbz, marks }: PolarEcho,
  rayStart: number,
  share: Float64Array,
  table: GateTable,
  largestDb: number,
  band: Uint16Array,
  added: Float32Array,
  report: ProfileReport,
): void {
  const [meltingBit, snowBit] = [markBit("melting"), markBit("snow")];
  for (let gate = table.firstTouched; gate < share.length; gate++) {
    const index = rayStart + gate;
    const value = dbz[index] as number;
    if (Number.isNaN(value)) continue;
    if ((table.overGroundDb[gate] as number) < -largestDb) {
      added[index] = Number.NaN;
      (report.lostGates[band[gate] as number] as number)++;
      if (value > Number.NEGATIVE_INFINITY) (report.wetGates[band[gate] as number] as number)--;
      continue;
    }
    if (value === Number.NEGATIVE_INFINITY) continue;
    const layered = share[gate] as number;
    const db = Math.max(-largestDb, addedDb(table, gate, layered));
    added[index] = db;
    (report.addedDb[band[gate] as number] as number) += db;
    if (Math.abs(db) > Math.abs(report.largestDb[band[gate] as number] as number)) {
      report.largestDb[band[gate] as number] = db;
    }
    const [melting, snow] = [table.meltingShare[gate] as number, table.snowShare[gate] as number];
    if (layered <= 0.5 || melting + snow <= 0.5) continue;
    if (melting >= snow) {
      marks[index] = (marks[index] as number) | meltingBit;
      report.meltingGates++;
    } else {
      marks[index] = (marks[index] as number) | snowBit;
      report.snowGates++;
    }
  }
}

function addedDb({ addedDb: table }: GateTable, gate: number, share: number): number {
  const steps = share * SHARE_STEPS;
  const step = Math.min(SHARE_STEPS - 1, Math.floor(steps));
  const at = gate * (SHARE_STEPS + 1) + step;
  const lower = table[at] as number;
  return lower + (steps - step) * ((table[at + 1] as number) - lower);
}

const tables = new WeakMap<LearnedProfile, Map<string, GateTable>>();

/** The table of a sweep's geometry, made once for each profile. */
function tableOf(
  { header }: PolarEcho,
  learned: LearnedProfile,
  settings: ProfileSettings,
): GateTable | undefined {
  const { profile } = learned;
  if (profile === undefined) return undefined;
  const { elevationDeg, gateCount, gateLengthM, firstGateCentreM, site, beamWidthDeg } = header;
  const key = [
    site.antennaHeightM,
    elevationDeg,
    gateCount,
    gateLengthM,
    firstGateCentreM,
    settings.beamWidthDeg ?? beamWidthDeg?.vertical,
    settings.radiusFactor,
    settings.groundAslM,
  ].join();
  const known = tables.get(learned) ?? new Map<string, GateTable>();
  tables.set(learned, known);
  const table = known.get(key) ?? gateTable(gateHeights(header, settings), profile, settings.groundAslM);
  known.set(key, table);
  return table;
}
