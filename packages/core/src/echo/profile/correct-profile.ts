import { ratioFromDecibels } from "../../units.ts";
import { addEffect, markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type BeamSettings, type GateTable, gateHeights, gateTable } from "./gate-table.ts";
import type { LearnedProfile, MeltingCorrelation } from "./learned-profile.ts";

export interface ProfileSettings extends BeamSettings {
  /** Most that is added or taken. A gate that would need more is not observed: nothing is left to scale up. */
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
  /** Shape [bands of {@link PROFILE_BAND_M}]: gates with echo, and the dB added to them, summed and largest either way. */
  readonly wetGates: Float64Array;
  readonly addedDb: Float64Array;
  readonly largestDb: Float64Array;
  /** Gates that became not observed, wet or dry. */
  readonly lostGates: Float64Array;
  /** Gates with echo that carry a mark. */
  readonly meltingGates: number;
  readonly snowGates: number;
}

/** Scatter of RHOHV in rain about its mean, one standard deviation; common practice for some 60 pulses. */
const CORRELATION_NOISE = 0.01;
/** How far the rain type alone leaves open whether a gate shares the profile (share from 0 to 1); house rule. */
const TYPE_NOISE = 0.35;
/** Gates on either side along the ray whose RHOHV speaks for a gate too. */
const NEIGHBOURS = 2;

/**
 * Brings the echo of a sweep down to the ground by the vertical profile.
 *
 * Beam-averaged: dBZ at the ground = dBZ of the gate + P(ground) - P(beam) (Kitchen, Brown and Davies 1994,
 * Q. J. R. Meteorol. Soc. 120, 1231-1254; Joss and Lee 1995, J. Appl. Meteorol. 34, 2612-2630). Convective rain has
 * no such profile and keeps its value; where RHOHV tells how much of a gate's echo is melting snow, that decides over
 * the rain type. What lies so high that it needs more than the limit is not observed, dry or wet, so that no sample of
 * rain alone remains.
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
  const bands = Math.floor((firstGateCentreM + (gateCount - 1) * gateLengthM) / PROFILE_BAND_M) + 1;
  const report = {
    basis: learned.basis,
    wetGates: new Float64Array(bands),
    addedDb: new Float64Array(bands),
    largestDb: new Float64Array(bands),
    lostGates: new Float64Array(bands),
    meltingGates: 0,
    snowGates: 0,
  };
  const table = tableOf(echo, learned, settings);
  if (table.firstTouched === gateCount) {
    countUntouched(echo, report.wetGates);
    return report;
  }

  const { dbz, marks, rhohv } = echo;
  const correlation = rhohv === undefined ? undefined : learned.layer?.correlation;
  const added = new Float32Array(dbz.length);
  const factor = table.overGroundDb.map(ratioFromDecibels);
  const [meltingBit, snowBit] = [markBit("melting"), markBit("snow")];
  for (let ray = 0; ray < rayCount; ray++) {
    for (let gate = 0; gate < gateCount; gate++) {
      const index = ray * gateCount + gate;
      const value = dbz[index] as number;
      if (Number.isNaN(value)) continue;
      const band = Math.floor((firstGateCentreM + gate * gateLengthM) / PROFILE_BAND_M);
      if (-(table.overGroundDb[gate] as number) > settings.largestCorrectionDb) {
        added[index] = Number.NaN;
        (report.lostGates[band] as number)++;
        continue;
      }
      if (value === Number.NEGATIVE_INFINITY) continue;
      (report.wetGates[band] as number)++;
      if (gate < table.firstTouched) continue;

      const convective = rainType !== undefined && rainType[index] === RAIN_TYPE.convective;
      let share = convective ? 0 : 1;
      if (correlation !== undefined && (table.meltingShare[gate] as number) > 0) {
        share = layeredShare(share, rhohv as Float32Array, ray * gateCount, gate, table, correlation);
      }
      if (share === 0) continue;
      const db = Math.max(
        -settings.largestCorrectionDb,
        -10 * Math.log10(1 + share * ((factor[gate] as number) - 1)),
      );
      added[index] = db;
      (report.addedDb[band] as number) += db;
      if (Math.abs(db) > Math.abs(report.largestDb[band] as number)) report.largestDb[band] = db;
      const [melting, snow] = [table.meltingShare[gate] as number, table.snowShare[gate] as number];
      if (share > 0.5 && melting + snow > 0.5) {
        marks[index] = (marks[index] as number) | (melting >= snow ? meltingBit : snowBit);
        if (melting >= snow) report.meltingGates++;
        else report.snowGates++;
      }
    }
  }
  addEffect(echo, "profile", added);
  return report;
}

/**
 * Share of a gate's rain that has the profile, 0 to 1: what the rain type says, corrected by how much RHOHV has fallen
 * over how much it would if all of it had, each by its own certainty.
 */
function layeredShare(
  byType: number,
  rhohv: Float32Array,
  rayStart: number,
  gate: number,
  { meltingShare }: GateTable,
  { inRain, drop }: MeltingCorrelation,
): number {
  let fallen = 0;
  let expected = 0;
  let count = 0;
  const last = Math.min(meltingShare.length - 1, gate + NEIGHBOURS);
  for (let near = Math.max(0, gate - NEIGHBOURS); near <= last; near++) {
    const rho = rhohv[rayStart + near] as number;
    if (Number.isNaN(rho)) continue;
    fallen += inRain - rho;
    expected += drop * (meltingShare[near] as number);
    count++;
  }
  if (expected <= 0) return byType;
  const byRho = Math.min(1, Math.max(0, fallen / expected));
  const certainty = (expected * expected) / (count * CORRELATION_NOISE * CORRELATION_NOISE);
  const typeCertainty = 1 / (TYPE_NOISE * TYPE_NOISE);
  return (certainty * byRho + typeCertainty * byType) / (certainty + typeCertainty);
}

function countUntouched({ dbz, header }: PolarEcho, wetGates: Float64Array): void {
  const { gateCount, firstGateCentreM, gateLengthM } = header;
  for (let index = 0; index < dbz.length; index++) {
    if (!((dbz[index] as number) > Number.NEGATIVE_INFINITY)) continue;
    const rangeM = firstGateCentreM + (index % gateCount) * gateLengthM;
    (wetGates[Math.floor(rangeM / PROFILE_BAND_M)] as number)++;
  }
}

const tables = new WeakMap<LearnedProfile, Map<string, GateTable>>();

/** The table of a sweep's geometry, made once for each profile. */
function tableOf({ header }: PolarEcho, learned: LearnedProfile, settings: ProfileSettings): GateTable {
  const { profile } = learned;
  if (profile === undefined) return untouchedTable(header.gateCount);
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

function untouchedTable(gateCount: number): GateTable {
  const nothing = new Float64Array(gateCount);
  return { overGroundDb: nothing, meltingShare: nothing, snowShare: nothing, firstTouched: gateCount };
}
