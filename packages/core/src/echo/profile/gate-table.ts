import { beamHeightM, effectiveRadiusM, STANDARD_RADIUS_FACTOR } from "../../beam.ts";
import type { SweepHeader } from "../../model/radar.ts";
import { ratioFromDecibels } from "../../units.ts";
import {
  beamProfileDb,
  beamSigmaM,
  layerShares,
  profileDb,
  type VerticalProfile,
} from "./vertical-profile.ts";

/** Taken where neither the file nor the plan gives a width; common practice. */
const USUAL_BEAM_WIDTH_DEG = 1;

/** What the height of a beam follows from, apart from the sweep itself. */
export interface BeamSettings {
  /** Vertical half-power width where the plan gives one; else that of the file, else 1 degree. */
  readonly beamWidthDeg?: number | undefined;
  /** Effective-earth-radius factor. */
  readonly radiusFactor?: number | undefined;
}

type GateHeader = Pick<
  SweepHeader,
  "site" | "elevationDeg" | "gateCount" | "gateLengthM" | "firstGateCentreM" | "beamWidthDeg"
>;

/** Heights above mean sea level of the gates of a sweep. Shape [gateCount] each. */
export interface GateHeights {
  readonly centreM: Float64Array;
  readonly sigmaM: Float64Array;
}

/** Where the beam of each gate is, and how wide it is over height. */
export function gateHeights(header: GateHeader, settings: BeamSettings = {}): GateHeights {
  const { elevationDeg, gateCount, gateLengthM, firstGateCentreM, site } = header;
  const widthDeg = settings.beamWidthDeg ?? header.beamWidthDeg?.vertical ?? USUAL_BEAM_WIDTH_DEG;
  const radiusM = effectiveRadiusM(settings.radiusFactor ?? STANDARD_RADIUS_FACTOR);
  const centreM = new Float64Array(gateCount);
  const sigmaM = new Float64Array(gateCount);
  for (let gate = 0; gate < gateCount; gate++) {
    const rangeM = firstGateCentreM + gate * gateLengthM;
    centreM[gate] = site.antennaHeightM + beamHeightM(rangeM, elevationDeg, radiusM);
    sigmaM[gate] = beamSigmaM(rangeM, widthDeg, elevationDeg, gateLengthM);
  }
  return { centreM, sigmaM };
}

/** What a profile means for the gates of a sweep. Shape [gateCount] each. */
export interface GateTable {
  /** What the beam sees over what falls on the ground, dB. */
  readonly overGroundDb: Float64Array;
  readonly meltingShare: Float64Array;
  readonly snowShare: Float64Array;
  /** Shape [gateCount * (SHARE_STEPS + 1)]: dB to add where a share of the rain has the profile, in even steps. */
  readonly addedDb: Float64Array;
  /** First gate that the layer or the profile touches; gateCount where none is. */
  readonly firstTouched: number;
}

/** Steps of the share of rain that has the profile; between them lies a straight line, wrong by less than 0.01 dB. */
export const SHARE_STEPS = 32;

/** Less than this share of a beam, and than this many dB, is nothing. */
const TOUCH_SHARE = 1e-3;
const TOUCH_DB = 1e-3;

/** @param groundM - height above mean sea level to which echo is brought down, and below which no beam sees */
export function gateTable(heights: GateHeights, profile: VerticalProfile, groundM: number): GateTable {
  const gateCount = heights.centreM.length;
  const table = {
    overGroundDb: new Float64Array(gateCount),
    meltingShare: new Float64Array(gateCount),
    snowShare: new Float64Array(gateCount),
    addedDb: new Float64Array(gateCount * (SHARE_STEPS + 1)),
    firstTouched: gateCount,
  };
  const atGroundDb = profileDb(profile, groundM);
  for (let gate = 0; gate < gateCount; gate++) {
    const [centreM, sigmaM] = [heights.centreM[gate] as number, heights.sigmaM[gate] as number];
    const { melting, snow } = layerShares(profile, centreM, sigmaM, groundM);
    const db = beamProfileDb(profile, centreM, sigmaM, groundM) - atGroundDb;
    table.meltingShare[gate] = melting;
    table.snowShare[gate] = snow;
    table.overGroundDb[gate] = db;
    const excess = ratioFromDecibels(db) - 1;
    for (let step = 0; step <= SHARE_STEPS; step++) {
      table.addedDb[gate * (SHARE_STEPS + 1) + step] = -10 * Math.log10(1 + (step / SHARE_STEPS) * excess);
    }
    const touched = melting + snow > TOUCH_SHARE || Math.abs(db) > TOUCH_DB;
    if (touched && table.firstTouched === gateCount) table.firstTouched = gate;
  }
  return table;
}
