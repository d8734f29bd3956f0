import { blockageCorrectionDb } from "../../blockage.ts";
import { addEffect, markBit, type PolarEcho } from "../polar-echo.ts";
import { LEARNED_RAYS, type LearnedBlockage, type LearnedSweepBlockage } from "./blockage-learner.ts";

/** How much blockage is corrected. */
export interface BlockageSettings {
  /** Share of the beam up to which echo is corrected; a gate above it is not observed. */
  readonly maxFraction: number;
}

/** Correction up to 70 % of the beam, 5.2 dB; 60 to 70 % are common practice. */
export const BLOCKAGE_SETTINGS: BlockageSettings = { maxFraction: 0.7 };

/** How many gates have their share from where. */
export interface JoinedBlockage {
  /** Shape [rayCount * gateCount], 0 to 1; NaN where nothing is known. */
  readonly fraction: Float32Array;
  readonly gatesByTerrain: number;
  readonly gatesByScans: number;
  readonly gatesUnknown: number;
}

/** Scans overrule terrain where they differ by so many of their standard errors. */
const OVERRULING_ERRORS = 2;
/** Elevations this near count as the one that was learned. */
const SAME_ELEVATION_DEG = 0.1 + 1e-9;

/**
 * What terrain says and what scans say, as one share of the beam by gate.
 *
 * Rule (ours): the terrain model speaks where it knows the ground; the scans speak where it does not, and where their loss
 * differs from its by more than two of their standard errors: they see trees, masts and bent beams, which it does not.
 * Where neither can tell, the share is not known, and nothing is corrected.
 *
 * @param geometry - azimuths, and the gates of the sweep
 * @param terrain - from `terrainBlockage` for the same sweep
 */
export function joinBlockage(
  geometry: {
    readonly elevationDeg: number;
    readonly azimuthDeg: Float64Array;
    readonly gateCount: number;
    readonly firstGateCentreM: number;
    readonly gateLengthM: number;
  },
  terrain: Float32Array | undefined,
  learned: LearnedBlockage | undefined,
): JoinedBlockage {
  const { azimuthDeg, gateCount, firstGateCentreM, gateLengthM } = geometry;
  const scans = learned?.sweeps.find(
    ({ elevationDeg }) => Math.abs(elevationDeg - geometry.elevationDeg) <= SAME_ELEVATION_DEG,
  );
  const fraction = new Float32Array(azimuthDeg.length * gateCount).fill(Number.NaN);
  let [gatesByTerrain, gatesByScans, gatesUnknown] = [0, 0, 0];
  for (let ray = 0; ray < azimuthDeg.length; ray++) {
    const degree = Math.min(LEARNED_RAYS - 1, Math.floor(azimuthDeg[ray] as number));
    for (let gate = 0; gate < gateCount; gate++) {
      const at = ray * gateCount + gate;
      const lossDb = lossAt(scans, degree, firstGateCentreM + gate * gateLengthM);
      const byTerrain = terrain === undefined ? Number.NaN : (terrain[at] as number);
      const differs =
        Math.abs(lossDb - blockageCorrectionDb(byTerrain)) >
        OVERRULING_ERRORS * (scans?.standardErrorDb[degree] as number);
      if (!Number.isNaN(lossDb) && (Number.isNaN(byTerrain) || differs)) {
        fraction[at] = 1 - 10 ** (-lossDb / 10);
        gatesByScans++;
      } else {
        fraction[at] = byTerrain;
        if (Number.isNaN(byTerrain)) gatesUnknown++;
        else gatesByTerrain++;
      }
    }
  }
  return { fraction, gatesByTerrain, gatesByScans, gatesUnknown };
}

/** What the scans say of a gate; NaN where they cannot tell. */
function lossAt(scans: LearnedSweepBlockage | undefined, degree: number, rangeM: number): number {
  const lossDb = scans?.lossDb[degree] ?? Number.NaN;
  if (Number.isNaN(lossDb)) return Number.NaN;
  if (lossDb > 0 && rangeM >= (scans?.fromRangeM[degree] as number)) return lossDb;
  return rangeM <= (scans?.toRangeM[degree] as number) ? 0 : Number.NaN;
}

/**
 * Gives back to partly blocked gates what terrain takes, -10 log10(1 - f) dB; a gate above the limit is marked "blocked"
 * and becomes not observed, dry or wet: a dry gate that rain could not be seen in says nothing.
 *
 * @param fraction - shape [rayCount * gateCount], as of {@link joinBlockage}; NaN corrects nothing
 * @returns how many gates were corrected and how many lost
 */
export function correctBlockage(
  echo: PolarEcho,
  fraction: Float32Array,
  settings: BlockageSettings = BLOCKAGE_SETTINGS,
): { readonly corrected: number; readonly lost: number } {
  const db = new Float32Array(fraction.length);
  const blocked = markBit("blocked");
  let [corrected, lost] = [0, 0];
  for (let gate = 0; gate < fraction.length; gate++) {
    const share = fraction[gate] as number;
    if (!(share > 0)) continue;
    if (share > settings.maxFraction) {
      db[gate] = Number.NaN;
      echo.marks[gate] = (echo.marks[gate] as number) | blocked;
      lost++;
    } else {
      db[gate] = blockageCorrectionDb(share);
      corrected++;
    }
  }
  echo.blockedFraction = fraction;
  addEffect(echo, "blockage", db);
  return { corrected, lost };
}
