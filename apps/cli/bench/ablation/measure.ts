import { keepScans } from "./kept-scans.ts";
import { runVariant, type VariantMaps, withOffers, worldPlan } from "./run-variant.ts";
import { samplingAlone } from "./sampling.ts";
import { commonCells, type Extremes, extremesOf, type MapScore, scoreMap } from "./scores.ts";
import { type ScreenToll, ScreenTolls } from "./screen-tolls.ts";
import { ALL, OFFERS_TAKEN, type Variant } from "./variants.ts";
import { isRadar, trueWorld, type WorldSize, worldFolder } from "./worlds.ts";

/** Share of the window from which a cell counts as observed; that of a fresh plan, below which no depth is printed. */
const LEAST_OBSERVED = 0.9;

/** A world and seed to measure, and in which ways. */
export interface Task {
  readonly world: string;
  readonly seed: number;
  readonly size: WorldSize;
  readonly variants: readonly Variant[];
  /** Moments that the files are to have, by name; undefined for all. */
  readonly moments: readonly string[] | undefined;
}

/** Where worlds are made and kept. */
export interface Place {
  readonly generator: string;
  readonly cache: string;
}

/** A map against the truth: on all cells, and on those free of clutter. */
export interface TwoScores {
  readonly all: MapScore;
  readonly clutterFree: MapScore;
}

export interface VariantScore extends TwoScores {
  readonly name: string;
  readonly extremes: Extremes;
  /** Cells that this variant did not observe. */
  readonly unobservedCells: number;
  readonly seconds: number;
}

/** What was offered as the calibration error of a radar, and what it truly was; dB. */
export interface CalibrationScore {
  readonly node: string;
  readonly plantedDb: number;
  /** Best estimate with its interval of 95 %; NaN where nothing could be told. */
  readonly errorDb: number;
  readonly lowDb: number;
  readonly highDb: number;
  /** To be added to every reflectivity; NaN where nothing was offered. */
  readonly offsetDb: number;
}

/** Scores of one world and seed: every variant on the same cells. */
export interface Measured {
  readonly world: string;
  readonly seed: number;
  /** Cells of the truth, and those left out because some variant did not observe them. */
  readonly cells: number;
  readonly leftOutCells: number;
  readonly scores: readonly VariantScore[];
  /** What scans without any fault would score, for being taken every few minutes. */
  readonly sampling: TwoScores;
  /** With every step. */
  readonly tolls: readonly ScreenToll[];
  readonly calibration: readonly CalibrationScore[];
}

/** Makes a world if need be, runs every variant on it, and scores them on the cells that all observed. */
export async function measure(task: Task, { generator, cache }: Place): Promise<Measured> {
  const world = trueWorld(worldFolder(generator, cache, task.world, task.seed, task.size));
  keepScans(task.size === "small", task.moments);
  const { totalMm, rangeKm, clutterFree, window } = world;
  const plan = await worldPlan(world);
  const windowHours = (Date.parse(window.to) - Date.parse(window.from)) / 3_600_000;
  const tolls = new ScreenTolls(world.radars, totalMm.length, windowHours);
  const maps: VariantMaps[] = [];
  const names: string[] = [];
  let offers: VariantMaps["offers"] = [];
  for (const variant of task.variants) {
    const isAll = variant.name === ALL.name;
    const map = await runVariant(world, plan, variant, isAll ? tolls : undefined);
    maps.push(map);
    names.push(variant.name);
    if (!isAll) continue;
    offers = map.offers;
    names.push(OFFERS_TAKEN);
    // Where nothing is offered, nothing changes.
    const isOffered = offers.some(({ offsetDb }) => offsetDb !== undefined);
    maps.push(isOffered ? await runVariant(world, withOffers(plan, offers), variant) : map);
  }
  const use = commonCells(
    maps.map(({ observed }) => observed),
    LEAST_OBSERVED,
  );
  const clean = use.map((used, cell) => used & clutterFree[cell]);
  const scores = (map: Float32Array): TwoScores => ({
    all: scoreMap(map, totalMm, use, rangeKm),
    clutterFree: scoreMap(map, totalMm, clean, rangeKm),
  });
  return {
    world: task.world,
    seed: task.seed,
    cells: use.length,
    leftOutCells: use.length - count(use),
    scores: maps.map((map, k) => ({
      name: names[k],
      ...scores(map.totalMm),
      extremes: extremesOf(map.totalMm, map.hoursMm, use),
      unobservedCells: use.length - count(commonCells([map.observed], LEAST_OBSERVED)),
      seconds: map.seconds,
    })),
    sampling: scores(samplingAlone(world)),
    tolls: tolls.finish(),
    calibration: world.radars.map(({ node, calibrationErrorDb }) => {
      const offer = offers.find(({ siteId }) => isRadar(siteId, node));
      return {
        node,
        plantedDb: calibrationErrorDb,
        errorDb: offer?.errorDb ?? Number.NaN,
        lowDb: offer?.lowDb ?? Number.NaN,
        highDb: offer?.highDb ?? Number.NaN,
        offsetDb: offer?.offsetDb ?? Number.NaN,
      };
    }),
  };
}

function count(flags: Uint8Array): number {
  return flags.reduce((sum, flag) => sum + flag, 0);
}
