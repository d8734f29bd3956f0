import {
  type CalibrationProposal,
  type LearnedEcho,
  PROFILE_BAND_M,
  SCREENS,
  type Screen,
} from "@rainreckon/core";
import type { Comparison } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import { calibrationProposals } from "./calibration.ts";
import { COMPANIONS, companionIndex, tollName } from "./companions.ts";
import type { UnitCounts } from "./job.ts";
import type { PreparedRun } from "./prepare.ts";

/** What one screen took away. */
export interface ScreenToll {
  readonly screen: Screen;
  readonly gates: number;
  /** Depth that its echo would have made: mean over the district, and the worst cell of the map. */
  readonly districtMm: number;
  readonly worstCellMm: number;
}

/** What one correction added to the rain of the district. */
export interface CorrectionEffect {
  readonly correction: "blockage" | "gas" | "attenuation" | "profile";
  /** Mean over the district, by depth. */
  readonly meanDb: number;
  /** Largest mean of a cell of the map, by its absolute value. */
  readonly largestDb: number;
}

/** What the vertical profile did to gates of one band of range. */
export interface ProfileEffect {
  readonly fromKm: number;
  readonly toKm: number;
  readonly wetGates: number;
  readonly meanDb: number;
  readonly lostGates: number;
}

/** What was done to the echo of a run before it became rain. */
export interface EchoAccount {
  readonly screens: readonly ScreenToll[];
  readonly corrections: readonly CorrectionEffect[];
  readonly gates: {
    readonly withEcho: number;
    readonly filled: number;
    readonly lostInAttenuation: number;
    readonly blocked: number;
    readonly hail: number;
    readonly melting: number;
    readonly snow: number;
    readonly besideCores: number;
  };
  /** What the vertical profile added, by range; bands without echo or loss are left out. */
  readonly profile: readonly ProfileEffect[];
  /** By site id. */
  readonly learned: ReadonlyMap<string, LearnedEcho>;
  readonly calibration: readonly CalibrationProposal[];
}

/** @returns undefined where no echo of the run was worked on */
export function echoAccount(
  run: PreparedRun,
  total: AssembledRun,
  comparison: Comparison,
): EchoAccount | undefined {
  const worked = run.shape.radars.filter(({ echo }) => echo !== undefined);
  if (worked.length === 0) return undefined;
  const { counts, planes } = total;
  return {
    screens: SCREENS.map((screen, s): ScreenToll => {
      const plane = planes.companions[companionIndex(tollName(screen))];
      return {
        screen,
        gates: counts.gatesScreened[s],
        districtMm: districtMeanMm(run, plane),
        worstCellMm: plane.reduce((most, mm) => Math.max(most, mm), 0),
      };
    }),
    corrections: (["blockage", "gas", "attenuation", "profile"] as const).map((correction) => {
      const plane = planes.companions[companionIndex(`${correction}_correction`)];
      return {
        correction,
        meanDb: meanByDepth(run, total, plane),
        largestDb: plane.reduce((most, db) => (Math.abs(db) > Math.abs(most) ? db : most), 0),
      };
    }),
    gates: {
      withEcho: counts.gatesWithEcho,
      filled: counts.gatesFilled,
      lostInAttenuation: counts.gatesLostInAttenuation,
      blocked: counts.gatesBlocked,
      hail: counts.gatesHail,
      melting: counts.gatesMelting,
      snow: counts.gatesSnow,
      besideCores: counts.gatesBesideCores,
    },
    profile: profileEffects(counts),
    calibration: calibrationProposals(run, comparison),
    learned: new Map(worked.map(({ site, echo }) => [site.id, (echo as { learned: LearnedEcho }).learned])),
  };
}

function profileEffects({ profileBands }: UnitCounts): ProfileEffect[] {
  const bandKm = PROFILE_BAND_M / 1000;
  return profileBands.flatMap(({ wetGates, addedCentiDb, lostGates }, band) =>
    wetGates + lostGates === 0
      ? []
      : [
          {
            fromKm: band * bandKm,
            toKm: (band + 1) * bandKm,
            wetGates,
            meanDb: wetGates === 0 ? 0 : addedCentiDb / 100 / wetGates,
            lostGates,
          },
        ],
  );
}

/** Companions that are anything but 0 in this run, with their planes. */
export function shownCompanions({ planes, sum }: AssembledRun): {
  readonly name: string;
  readonly longName: string;
  readonly units: string;
  readonly kind: (typeof COMPANIONS)[number]["kind"];
  readonly values: Float32Array;
}[] {
  return COMPANIONS.flatMap((companion, c) =>
    sum.companions[c] === undefined ? [] : [{ ...companion, values: planes.companions[c] }],
  );
}

/** Depth that screened echo would have made, all screens together. Shape [cells]. */
export function screenedDepthMm({ planes }: AssembledRun): Float32Array {
  const all = new Float32Array(planes.totalMm.length);
  for (const [c, { kind }] of COMPANIONS.entries()) {
    if (kind !== "toll") continue;
    const plane = planes.companions[c];
    for (let cell = 0; cell < all.length; cell++) all[cell] += plane[cell];
  }
  return all;
}

function districtMeanMm({ district }: PreparedRun, plane: Float32Array): number {
  let sum = 0;
  let weight = 0;
  for (let k = 0; k < district.cells.length; k++) {
    sum += district.fraction[k] * plane[district.cells[k]];
    weight += district.fraction[k];
  }
  return weight > 0 ? sum / weight : 0;
}

function meanByDepth({ district }: PreparedRun, { sum }: AssembledRun, plane: Float32Array): number {
  let effect = 0;
  let depth = 0;
  for (let k = 0; k < district.cells.length; k++) {
    const cell = district.cells[k];
    if (Number.isNaN(plane[cell])) continue;
    const mm = district.fraction[k] * sum.depthMm[cell];
    effect += mm * plane[cell];
    depth += mm;
  }
  return depth > 0 ? effect / depth : 0;
}

/** What a run learned of a radar, one statement each, for people. */
function learnedWords(learned: LearnedEcho, proposal?: CalibrationProposal): string[] {
  const words: string[] = [`learned from ${learned.roundCount} rounds`];
  const { systemPhaseDeg, alphaDbPerDeg } = learned.attenuation;
  if (systemPhaseDeg !== undefined) words.push(`phase of the system ${systemPhaseDeg.toFixed(1)}°`);
  if (alphaDbPerDeg !== undefined)
    words.push(`two-way loss in rain ${alphaDbPerDeg.toFixed(3)} dB per degree of PHIDP`);
  if (proposal !== undefined) words.push(`calibration: ${proposal.reason}`);
  if (learned.zdrOffsetDb !== 0) words.push(`its ZDR reads ${learned.zdrOffsetDb.toFixed(2)} dB too high`);
  const { profile } = learned;
  if (profile !== undefined) {
    const { layer, basis, reason } = profile;
    words.push(
      layer === undefined
        ? `no vertical profile: ${reason}`
        : `snow melts between ${Math.round(layer.bottomM)} and ${Math.round(layer.topM)} m above the sea (${layer.basis === "scans" ? `± ${Math.round(layer.uncertaintyM)} m, from the scans` : "from the plan"}); profile ${basis}`,
    );
  }
  return words;
}

/** {@link learnedWords} of every radar, by site id. */
export function wordsByRadar({ learned, calibration }: EchoAccount): [string, string[]][] {
  return [...learned].map(([id, one]) => [
    id,
    learnedWords(
      one,
      calibration.find(({ siteId }) => siteId === id),
    ),
  ]);
}
