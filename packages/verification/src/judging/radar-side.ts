import type { RadarSight } from "../evidence.ts";
import type { CauseName } from "../verdict.ts";
import { mm } from "./words.ts";

/** A difference from which its cause is asked for, dB: what a sound radar and a sound gauge seldom differ by. House rule. */
export const ASK_DB = 1.5;

/** What in the radar's sight of a place can explain a difference, with its number. */
export interface RadarSide {
  readonly cause: CauseName;
  readonly numbers: Readonly<Record<string, number>>;
  readonly sentence: string;
}

interface Symptom {
  readonly cause: CauseName;
  /** Whether it makes the radar read too little, too much, or either. */
  readonly makes: "low" | "high" | "either";
  /** How far it goes beyond where it begins to count: the strongest symptom speaks; 1 and above counts. */
  readonly strength: (sight: RadarSight, radarMm: number) => number;
  readonly says: (sight: RadarSight) => readonly [numbers: Record<string, number>, sentence: string];
}

const percent = (share: number) => `${Math.round(100 * share)} %`;

/**
 * Symptoms in the planes of a run and what they begin to count from. House rules; the sizes are those at which such
 * errors reach about a decibel: half a decibel of blockage is a tenth of the beam, a beam above 1.5 km misses growth below
 * it, a third of the depth from melting snow carries two of its six decibels.
 */
const SYMPTOMS: readonly Symptom[] = [
  {
    cause: "hole-in-time",
    makes: "either",
    strength: ({ observedFraction, bridgedFraction }) =>
      Math.max((1 - observedFraction) / 0.1, bridgedFraction / 0.25),
    says: ({ observedFraction, bridgedFraction }) => [
      { observedFraction, bridgedFraction },
      `The radar observed ${percent(observedFraction)} of the time over the gauge, ${percent(bridgedFraction)} bridged between scans far apart.`,
    ],
  },
  {
    cause: "blocked-sector",
    makes: "low",
    strength: ({ blockedFraction, blockageCorrectionDb }) =>
      Math.max(blockedFraction / 0.15, blockageCorrectionDb / 1),
    says: ({ blockedFraction, blockageCorrectionDb }) => [
      { blockedFraction, blockageCorrectionDb },
      `Terrain takes ${percent(blockedFraction)} of the beam over the gauge.`,
    ],
  },
  {
    cause: "behind-attenuation",
    makes: "low",
    strength: ({ twoWayLossDb }) => twoWayLossDb / 3,
    says: ({ twoWayLossDb }) => [
      { twoWayLossDb },
      `Rain and air on the way to the gauge take an estimated ${twoWayLossDb.toFixed(1)} dB.`,
    ],
  },
  {
    cause: "beam-too-high",
    makes: "low",
    strength: ({ beamHeightAslM, antennaAslM, profileCorrectionDb, snowFraction }) =>
      Math.max((beamHeightAslM - antennaAslM) / 1500, profileCorrectionDb / 2, snowFraction / 0.3),
    says: ({ beamHeightAslM, profileCorrectionDb }) => [
      { beamHeightAslM, profileCorrectionDb },
      `The beam stands ${Math.round(beamHeightAslM)} m above the sea over the gauge.`,
    ],
  },
  {
    cause: "at-cap",
    makes: "low",
    strength: ({ cappedFraction }) => cappedFraction / 0.1,
    says: ({ cappedFraction }) => [
      { cappedFraction },
      `${percent(cappedFraction)} of the radar's depth over the gauge met the cap.`,
    ],
  },
  {
    cause: "below-detection",
    makes: "low",
    strength: ({ unseenMm }, radarMm) => unseenMm / Math.max(0.5, 0.2 * radarMm),
    says: ({ unseenMm }) => [
      { unseenMm },
      `Up to ${mm(unseenMm)} may have fallen over the gauge without being seen.`,
    ],
  },
  {
    cause: "bright-band",
    makes: "high",
    strength: ({ meltingFraction, profileCorrectionDb }) =>
      Math.max(meltingFraction / 0.3, -profileCorrectionDb / 2),
    says: ({ meltingFraction }) => [
      { meltingFraction },
      `${percent(meltingFraction)} of the radar's depth over the gauge comes from melting snow.`,
    ],
  },
  {
    cause: "hail",
    makes: "high",
    strength: ({ hailFraction }) => hailFraction / 0.1,
    says: ({ hailFraction }) => [
      { hailFraction },
      `${percent(hailFraction)} of the radar's depth over the gauge comes from gates taken for hail.`,
    ],
  },
  {
    cause: "clutter",
    makes: "either",
    strength: ({ screenedMm, filledFraction }, radarMm) =>
      Math.max(screenedMm / Math.max(1, 0.3 * radarMm), filledFraction / 0.3),
    says: ({ screenedMm, filledFraction }) => [
      { screenedMm, filledFraction },
      `Screens took ${mm(screenedMm)} over the gauge, ${percent(filledFraction)} of what is left was filled from around it.`,
    ],
  },
];

/**
 * What in the radar's sight explains that it reads less (or more) than a gauge.
 *
 * @param excessMm - what the gauge has more than the radar; negative for less
 * @returns the strongest symptom that works in that direction; undefined where none counts
 */
export function radarSide(sight: RadarSight, excessMm: number, radarMm: number): RadarSide | undefined {
  const direction = excessMm > 0 ? "low" : "high";
  let best: { symptom: Symptom; strength: number } | undefined;
  for (const symptom of SYMPTOMS) {
    if (symptom.makes !== "either" && symptom.makes !== direction) continue;
    const strength = symptom.strength(sight, radarMm);
    if (strength >= 1 && strength > (best?.strength ?? 0)) best = { symptom, strength };
  }
  if (best === undefined) return undefined;
  const [numbers, sentence] = best.symptom.says(sight);
  return { cause: best.symptom.cause, numbers, sentence };
}
