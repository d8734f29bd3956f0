import path from "node:path";
import {
  BlockageLearner,
  EchoChain,
  type EchoSettings,
  type Grid,
  InputError,
  type LearnedEcho,
  layerBelowFreezing,
  MeltingLayerLearner,
  NOTHING_LEARNED,
  type PolarEcho,
  ProfileLearner,
  StaticEchoLearner,
  SystemPhaseLearner,
  terrainCaution,
} from "@rainreckon/core";
import { formatsReady, readTerrain } from "@rainreckon/formats";
import {
  type HeightAt,
  rainTypeOfGates,
  TERRAIN_SAMPLING,
  terrainAlongRays,
  terrainHeights,
} from "@rainreckon/mosaic";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import type { JobRadar, JobRound } from "./job.ts";
import { lookupShelf } from "./lookup-shelf.ts";
import { RoundEchoes } from "./round-echoes.ts";

/** So many rounds of each radar are learned from, spread evenly over the run: it costs the same for a day and a year. */
export const ROUNDS_LEARNED = 48;
/** Terrain farther away than this stands in no beam that speaks for the ground. */
const TERRAIN_REACH_M = 250_000;

/** A radar and how its echo is to be worked on. */
export interface Learner {
  readonly radar: JobRadar;
  readonly settings: EchoSettings;
  /** Whether showers and widespread rain are told apart. */
  readonly rainType: boolean;
}

/**
 * What a run must know of its radars before its units of work: echo that never moves, sectors that are blocked, the
 * phase of the system, the melting layer and the profile.
 *
 * Some rounds of each radar are read twice: once as they are, for what is static; once screened and corrected by
 * that. It depends on which scans there are and on the plan, not on files, order or the number of workers.
 *
 * @param log - is told what could not be learned
 */
export async function learnEchoes(
  learners: readonly Learner[],
  grid: Grid,
  loaded: LoadedPlan,
  log: LeftOutLog,
): Promise<LearnedEcho[]> {
  await formatsReady();
  const heightAt = await terrainOf(loaded, log);
  const { freezingHeightAslM } = loaded.plan.echo.profile;
  const { dbPerDeg } = loaded.plan.echo.attenuation;
  const taught = learners.map((learner): Taught => {
    const { radar, settings } = learner;
    const rounds = spreadEvenly(radar.rounds, ROUNDS_LEARNED);
    const still = learnStill(radar, settings, rounds);
    const terrain =
      heightAt === undefined || settings.blockage === undefined
        ? undefined
        : terrainAlongRays(heightAt, radar.site, { ...TERRAIN_SAMPLING, reachM: TERRAIN_REACH_M });
    const caution = terrain === undefined ? undefined : terrainCaution(terrain);
    if (caution !== undefined)
      log.add("doubted", {
        what: caution,
        where: `radar ${radar.site.id}`,
        fix: "give a larger terrain model",
      });
    const attenuation =
      dbPerDeg === undefined ? still.attenuation : { ...still.attenuation, alphaDbPerDeg: dbPerDeg };
    return learnMoving(learner, grid, rounds, { ...still, terrain, attenuation });
  });
  const layers = taught.map(({ layer }) => layer.finish()).filter((layer) => layer !== undefined);
  const surest = layers.toSorted((a, b) => a.uncertaintyM - b.uncertaintyM)[0];
  return taught.map(({ learned, layer, profile }, k) => {
    if (learners[k]?.settings.profile === undefined) return learned;
    // A radar that cannot tell where snow melts takes it from the one that tells best: it is the same air.
    const melting =
      freezingHeightAslM === undefined ? (layer.finish() ?? surest) : layerBelowFreezing(freezingHeightAslM);
    return { ...learned, profile: profile.finish(melting) };
  });
}

/** What one radar taught, its profile still to be fitted about a melting layer. */
interface Taught {
  readonly learned: LearnedEcho;
  readonly layer: MeltingLayerLearner;
  readonly profile: ProfileLearner;
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

/** At most so many of a list, the first and the last among them, at even steps. */
export function spreadEvenly<Item>(items: readonly Item[], most: number): Item[] {
  if (items.length <= most) return [...items];
  return Array.from(
    { length: most },
    (_, k) => items[Math.round((k * (items.length - 1)) / (most - 1))] as Item,
  );
}

/** First reading: echo as it was measured. */
function learnStill(radar: JobRadar, { screening }: EchoSettings, rounds: readonly JobRound[]): LearnedEcho {
  const staticEcho = new StaticEchoLearner();
  const systemPhase = new SystemPhaseLearner();
  forEachEcho(radar, rounds, (echo) => {
    if (screening !== undefined) staticEcho.add(echo);
    systemPhase.add(echo);
  });
  const phase = systemPhase.finish();
  return {
    ...NOTHING_LEARNED,
    roundCount: rounds.length,
    staticEcho: screening === undefined ? undefined : staticEcho.finish(),
    attenuation: phase === undefined ? {} : { systemPhaseDeg: phase.systemPhaseDeg },
  };
}

/** Second reading: echo without what stands still, corrected as far as is known by then. */
function learnMoving(
  { radar, settings, rainType }: Learner,
  grid: Grid,
  rounds: readonly JobRound[],
  known: LearnedEcho,
): Taught {
  const blockage = new BlockageLearner();
  const layer = new MeltingLayerLearner(settings.profile);
  const profile = new ProfileLearner(settings.profile);
  const chain = new EchoChain({ ...settings, profile: undefined }, known);
  forEachEcho(radar, rounds, (echo, above) => {
    chain.correct(echo, above);
    if (settings.blockage !== undefined) blockage.add(echo);
    if (settings.profile === undefined) return;
    const lookup = lookupShelf(grid, radar).forSweep({ ...echo.header, azimuthDeg: echo.azimuthDeg });
    const type = rainType ? rainTypeOfGates(lookup, grid, echo.dbz) : undefined;
    layer.add(echo, type);
    profile.add(echo, type);
  });
  return {
    learned: { ...known, blockage: settings.blockage === undefined ? undefined : blockage.finish() },
    layer,
    profile,
  };
}

/** Every sweep of some rounds that decodes, lowest first in its round; a unit of work tells of those that do not. */
function forEachEcho(
  radar: JobRadar,
  rounds: readonly JobRound[],
  take: (echo: PolarEcho, above: PolarEcho | undefined) => void,
): void {
  for (const round of rounds) {
    const echoes = new RoundEchoes(radar, round, () => {});
    try {
      for (const sweep of round.sweeps) {
        try {
          const echo = echoes.echo(sweep);
          if (echo !== undefined) take(echo, echoes.above(sweep));
        } catch (error) {
          echoes.tell(sweep, error);
        }
      }
    } finally {
      echoes.close();
    }
  }
}
