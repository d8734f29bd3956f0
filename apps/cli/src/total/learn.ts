import path from "node:path";
import {
  attenuationLine,
  BlockageLearner,
  ConsistencyLearner,
  DropNumberLearner,
  DropSizeLearner,
  EchoChain,
  type EchoSettings,
  type Grid,
  InputError,
  joinDropSizes,
  type LearnedEcho,
  LossCoefficientLearner,
  type LossEstimate,
  layerBelowFreezing,
  MeltingLayerLearner,
  NOTHING_LEARNED,
  type OverlapDifference,
  type OverlapPairs,
  overlapDifference,
  type PolarEcho,
  ProfileLearner,
  phaseCoefficients,
  StaticEchoLearner,
  SystemPhaseLearner,
  settleLossCoefficients,
  terrainCaution,
  turned,
  ZdrOffsetLearner,
} from "@rainreckon/core";
import { formatsReady, readTerrain } from "@rainreckon/formats";
import {
  type HeightAt,
  OVERLAP_SETTINGS,
  OverlapSamples,
  type OverlapSweep,
  type PolarLookup,
  rainTypeOfGates,
  TERRAIN_SAMPLING,
  terrainAlongRays,
  terrainHeights,
} from "@rainreckon/mosaic";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { distanceFrom } from "./distances.ts";
import type { JobRadar } from "./job.ts";
import { forEachEcho, type LearningInstant, learningInstants } from "./learning-rounds.ts";
import { lookupShelf } from "./lookup-shelf.ts";

/** So many rounds of each radar are learned from, spread evenly over the run: it costs the same for a day and a year. */
export const ROUNDS_LEARNED = 48;
/** Of those, every so many-th is read a third time, once the loss in rain is settled. */
const THIRD_READING_EVERY = 2;
/** Moments that the first reading is about, beside the reflectivity. */
const FIRST_READING = ["VRADH", "RHOHV", "PHIDP"];
/** Terrain farther away than this stands in no beam that speaks for the ground. */
const TERRAIN_REACH_M = 250_000;
/** Sweeps of a round, from the lowest, that are compared with those of another radar. */
const SWEEPS_COMPARED = 3;

/** A radar and how its echo is to be worked on. */
export interface Learner {
  readonly radar: JobRadar;
  readonly settings: EchoSettings;
  /** Whether showers and widespread rain are told apart. */
  readonly rainType: boolean;
}

/** One radar while it teaches. */
interface Pupil extends Learner {
  known: LearnedEcho;
  readonly staticEcho: StaticEchoLearner;
  readonly systemPhase: SystemPhaseLearner;
  readonly loss: LossCoefficientLearner;
  readonly blockage: BlockageLearner;
  readonly layer: MeltingLayerLearner;
  readonly profile: ProfileLearner;
  readonly zdrOffset: ZdrOffsetLearner;
  readonly dropNumber: DropNumberLearner;
  readonly dropSize: DropSizeLearner;
  readonly consistency: ConsistencyLearner;
}

/** What a run taught: of each radar, and of each two that see the same rain. */
export interface Lesson {
  /** In the order of the learners. */
  readonly learned: readonly LearnedEcho[];
  readonly overlaps: readonly OverlapDifference[];
}

/**
 * What a run must know of its radars before its units of work: echo that never moves, the phase of the system, sectors
 * that are blocked, the loss in rain, the melting layer and the vertical profile, the offset of ZDR, size and
 * number of drops.
 *
 * Some rounds of each radar are read up to three times: as they are, for what is static; screened by that, for the
 * loss in rain; and some of them corrected, for the rest. It depends on which scans there are and on the plan, not on
 * files, order or the number of workers.
 *
 * @param log - is told what could not be learned
 */
export async function learnEchoes(
  learners: readonly Learner[],
  grid: Grid,
  loaded: LoadedPlan,
  log: LeftOutLog,
): Promise<Lesson> {
  await formatsReady();
  const heightAt = await terrainOf(loaded, log);
  const instants = learningInstants(
    learners.map(({ radar }) => radar),
    ROUNDS_LEARNED,
  );
  const pupils = learners.map((learner) => pupil(learner, instants, heightAt, log));
  learnStill(pupils, instants);
  const overlaps = learnLoss(pupils, instants, grid);
  settleLoss(pupils, overlaps, loaded.plan.echo.attenuation.dbPerDeg);
  learnCorrected(
    pupils,
    instants.filter((_, k) => k % THIRD_READING_EVERY === 0),
    grid,
  );
  settleProfile(pupils, loaded.plan.echo.profile.freezingHeightAslM);
  return {
    learned: pupils.map(({ known }) => known),
    overlaps: overlaps.map((pairs) => differenceOf(pairs, pupils)).filter((one) => one !== undefined),
  };
}

function pupil(
  learner: Learner,
  instants: readonly LearningInstant[],
  heightAt: HeightAt | undefined,
  log: LeftOutLog,
): Pupil {
  const { radar, settings } = learner;
  const terrain =
    heightAt === undefined || settings.blockage === undefined
      ? undefined
      : terrainAlongRays(heightAt, radar.site, { ...TERRAIN_SAMPLING, reachM: TERRAIN_REACH_M });
  const caution = terrain === undefined ? undefined : terrainCaution(terrain);
  if (caution !== undefined) {
    log.add("doubted", {
      what: caution,
      where: `radar ${radar.site.id}`,
      fix: "give a larger terrain model",
    });
  }
  const roundCount = instants.filter(({ rounds }) => rounds.has(radar)).length;
  return {
    ...learner,
    known: { ...NOTHING_LEARNED, roundCount, terrain },
    staticEcho: new StaticEchoLearner(),
    systemPhase: new SystemPhaseLearner(),
    loss: new LossCoefficientLearner(),
    blockage: new BlockageLearner(),
    layer: new MeltingLayerLearner(settings.profile),
    profile: new ProfileLearner(settings.profile),
    zdrOffset: new ZdrOffsetLearner(),
    dropNumber: new DropNumberLearner(),
    dropSize: new DropSizeLearner(),
    consistency: new ConsistencyLearner(),
  };
}

/** First reading: echo as it was measured. */
function learnStill(pupils: readonly Pupil[], instants: readonly LearningInstant[]): void {
  for (const one of pupils) {
    const { radar, settings, staticEcho, systemPhase } = one;
    for (const { rounds } of instants) {
      const round = rounds.get(radar);
      if (round === undefined) continue;
      const take = (echo: PolarEcho) => {
        if (settings.screening !== undefined) staticEcho.add(echo);
        systemPhase.add(echo);
      };
      forEachEcho(radar, round, take, FIRST_READING);
    }
    const phase = systemPhase.finish();
    one.known = {
      ...one.known,
      staticEcho: settings.screening === undefined ? undefined : staticEcho.finish(),
      attenuation: phase === undefined ? {} : { systemPhaseDeg: phase.systemPhaseDeg },
    };
  }
}

/** Second reading: echo without what stands still, before anything is given back for rain. */
function learnLoss(
  pupils: readonly Pupil[],
  instants: readonly LearningInstant[],
  grid: Grid,
): OverlapPairs[] {
  const chains = new Map(
    pupils.map(({ radar, settings, known }) => [
      radar,
      new EchoChain({ ...settings, attenuation: undefined, profile: undefined }, known),
    ]),
  );
  const overlaps = pupils.flatMap((one, k) =>
    pupils.slice(k + 1).map((other) => ({
      one: one.radar,
      other: other.radar,
      samples: new OverlapSamples({
        ...OVERLAP_SETTINGS,
        maxTimeStepMs: Math.min(one.radar.time.medianRoundMs, other.radar.time.medianRoundMs) / 2,
      }),
    })),
  );
  for (const { rounds } of instants) {
    const low = new Map<JobRadar, OverlapSweep[]>();
    for (const { radar, settings, loss, blockage } of pupils) {
      const round = rounds.get(radar);
      if (round === undefined) continue;
      const kept: OverlapSweep[] = [];
      low.set(radar, kept);
      forEachEcho(radar, round, (echo, above) => {
        chains.get(radar)?.correct(echo, above);
        loss.add(echo);
        if (settings.blockage !== undefined) blockage.add(echo);
        if (kept.length >= SWEEPS_COMPARED || overlaps.length === 0) return;
        kept.push({ echo, lookup: lookupOf(grid, radar, echo), distanceM: distanceFrom(grid, radar) });
      });
    }
    for (const { one, other, samples } of overlaps) {
      for (const mine of low.get(one) ?? []) {
        for (const theirs of low.get(other) ?? []) samples.add(mine, theirs);
      }
    }
  }
  for (const one of pupils) {
    if (one.settings.blockage !== undefined) one.known = { ...one.known, blockage: one.blockage.finish() };
  }
  return overlaps.map(({ samples }) => samples.finish()).filter((pairs) => pairs !== undefined);
}

/**
 * The loss per degree of phase, settled for all radars: first from each alone, then with what others show that see the
 * same rain, whose own loss is the one settled first.
 */
function settleLoss(
  pupils: readonly Pupil[],
  overlaps: readonly OverlapPairs[],
  dbPerDeg: number | undefined,
): void {
  const alone = pupils.map(({ radar, loss }) => {
    const own = loss.finish();
    return { wavelengthM: radar.wavelengthM ?? Number.NaN, estimates: own === undefined ? [] : [own] };
  });
  const first = settleLossCoefficients(alone);
  const lossOf = (siteId: string) =>
    first[pupils.findIndex(({ radar }) => radar.site.id === siteId)]?.alphaDbPerDeg;
  const settled = settleLossCoefficients(
    alone.map(({ wavelengthM, estimates }, k) => ({
      wavelengthM,
      estimates: [...estimates, ...fromNeighbours(pupils[k] as Pupil, overlaps, lossOf)],
    })),
  );
  for (const [k, one] of pupils.entries()) {
    const alphaDbPerDeg = dbPerDeg ?? settled[k]?.alphaDbPerDeg;
    if (alphaDbPerDeg === undefined) continue;
    one.known = { ...one.known, attenuation: { ...one.known.attenuation, alphaDbPerDeg } };
  }
}

/** How much more one radar of a pair shows than the other. */
function differenceOf(pairs: OverlapPairs, pupils: readonly Pupil[]): OverlapDifference | undefined {
  const lossOf = (siteId: string) => {
    const wavelengthM = pupils.find(({ radar }) => radar.site.id === siteId)?.radar.wavelengthM;
    return wavelengthM === undefined ? undefined : phaseCoefficients(wavelengthM)?.loss.dbPerDeg;
  };
  const [oneDbPerDeg, otherDbPerDeg] = [lossOf(pairs.oneSiteId), lossOf(pairs.otherSiteId)];
  return overlapDifference(
    pairs,
    oneDbPerDeg === undefined || otherDbPerDeg === undefined ? undefined : { oneDbPerDeg, otherDbPerDeg },
  );
}

function fromNeighbours(
  { radar }: Pupil,
  overlaps: readonly OverlapPairs[],
  lossOf: (siteId: string) => number | undefined,
): LossEstimate[] {
  return overlaps.flatMap((pairs) => {
    const { id } = radar.site;
    if (pairs.oneSiteId !== id && pairs.otherSiteId !== id) return [];
    const mine = pairs.oneSiteId === id ? pairs : turned(pairs);
    const neighbourDbPerDeg = lossOf(mine.otherSiteId);
    if (neighbourDbPerDeg === undefined) return [];
    const fit = attenuationLine(mine, neighbourDbPerDeg);
    return fit === undefined
      ? []
      : [{ alphaDbPerDeg: fit.line.slope, standardErrorDbPerDeg: fit.line.slopeError }];
  });
}

/** Third reading: echo corrected by all that is known by now. */
function learnCorrected(pupils: readonly Pupil[], instants: readonly LearningInstant[], grid: Grid): void {
  for (const one of pupils) {
    const { radar, settings, rainType, layer, profile, zdrOffset, dropNumber, dropSize, consistency } = one;
    const chain = new EchoChain({ ...settings, profile: undefined }, one.known);
    for (const { rounds } of instants) {
      const round = rounds.get(radar);
      if (round === undefined) continue;
      forEachEcho(radar, round, (echo, above) => {
        chain.correct(echo, above);
        zdrOffset.add(echo);
        dropNumber.add(echo);
        dropSize.add(echo);
        consistency.add(echo);
        if (settings.profile === undefined) return;
        const type = rainType ? rainTypeOfGates(lookupOf(grid, radar, echo), grid, echo.dbz) : undefined;
        layer.add(echo, type);
        profile.add(echo, type);
      });
    }
    const { offsetDb } = zdrOffset.finish();
    one.known = {
      ...one.known,
      zdrOffsetDb: offsetDb,
      dropNumber: dropNumber.finish(),
      dropSize: dropSize.finish(offsetDb),
      consistency: consistency.finish(),
    };
  }
  // Drops are the rain's, not the radar's: one that cannot tell takes it from those that can.
  const joined = joinDropSizes(pupils.map(({ known }) => known.dropSize));
  for (const one of pupils) one.known = { ...one.known, dropSize: joined };
}

/** The vertical profile of each radar about the melting layer. */
function settleProfile(pupils: readonly Pupil[], freezingHeightAslM: number | undefined): void {
  const layers = pupils.map(({ layer }) => layer.finish()).filter((layer) => layer !== undefined);
  const surest = layers.toSorted((a, b) => a.uncertaintyM - b.uncertaintyM)[0];
  for (const one of pupils) {
    if (one.settings.profile === undefined) continue;
    // A radar that cannot tell where snow melts takes it from the one that tells best: it is the same air.
    const melting =
      freezingHeightAslM === undefined
        ? (one.layer.finish() ?? surest)
        : layerBelowFreezing(freezingHeightAslM);
    one.known = { ...one.known, profile: one.profile.finish(melting) };
  }
}

function lookupOf(grid: Grid, radar: JobRadar, { header, azimuthDeg }: PolarEcho): PolarLookup {
  return lookupShelf(grid, radar).forSweep({ ...header, azimuthDeg });
}

/** Heights of the plan's terrain model; one that cannot be read is told of and left out. */
async function terrainOf(
  { terrainFile, folder }: LoadedPlan,
  log: LeftOutLog,
): Promise<HeightAt | undefined> {
  if (terrainFile === undefined) return undefined;
  try {
    return terrainHeights(await readTerrain(terrainFile));
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const where = error.where.replaceAll(`${folder}${path.sep}`, "");
    log.add("terrain left out", { what: error.what, where, fix: error.fix });
    return undefined;
  }
}
