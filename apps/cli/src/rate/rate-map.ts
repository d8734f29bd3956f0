import { existsSync, mkdirSync, readdirSync, renameSync } from "node:fs";
import path from "node:path";
import { InputError, midEpochMs, SCREENS } from "@rainreckon/core";
import { displayText, type JsonValue, writeGeoTiff, writeJson } from "@rainreckon/formats";
import type { ManifestInput } from "../manifest.ts";
import { loadPlan } from "../plan/load.ts";
import { indexScans, type RadarInput } from "../total/inputs.ts";
import type { JobRadar, JobRound, UnitCounts } from "../total/job.ts";
import { learnFor } from "../total/learned-run.ts";
import { gridMap, jobRadar } from "../total/prepare.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { counted, decimals, isoUtc, utcText } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { blendRates, type RateLayerOfRadar, rateLayer } from "./rate-layers.ts";

const MAP_FILE = "rain_rate.tif";
const FACTS_FILE = "rate.json";
/** Radars that look more than this apart do not show one instant. */
const ONE_INSTANT_MS = 5 * 60_000;

/**
 * Rain rate at one instant per radar, the last of the window: a GeoTIFF, and beside it what it was made from.
 *
 * @returns how many things were left out, doubted or assumed
 * @throws InputError (no-input) where no radar shows anything, and of kind "usage" where the folder is not empty
 */
export async function makeRateMap(planPath: string, out: string, terminal: Terminal): Promise<number> {
  const loaded = await loadPlan(planPath);
  const log = leftOutLog(terminal);
  for (const notice of loaded.notices) log.add("file not found", notice);
  const { grid } = loaded.plan;
  const map = gridMap(grid);
  if (!loaded.plan.radars.some(({ use }) => use)) {
    throw new InputError(
      "a map of rain rate is made from scans, and the plan uses no radar",
      `${planPath}, radars`,
      "leave --rate out for a total of the gridded rain",
      { kind: "no-input" },
    );
  }
  const folder = freshFolder(out);

  const inputs: ManifestInput[] = [];
  const indexing = progressBar(terminal, loaded.scanFiles.length, "scans");
  const radars = await indexScans(loaded, log, (input) => inputs.push(input), indexing);
  indexing.end();
  const toMs = Date.parse(loaded.plan.window.to);
  const { radars: jobs } = await learnFor(
    radars.map((radar) => jobRadar(radar, loaded, undefined, log)),
    loaded,
    log,
  );
  const chosen = radars.flatMap((radar, k) => roundOf(radar, jobs[k] as JobRadar, toMs));
  const layers: RateLayerOfRadar[] = [];
  for (const { radar, round } of chosen) {
    const layer = rateLayer(grid, radar, round, (notice) => log.add("sweep left out", notice));
    if (layer !== undefined) layers.push(layer);
  }
  if (layers.length === 0) {
    throw new InputError(
      "no radar shows anything on the grid",
      `plan, window to ${loaded.plan.window.to}`,
      "check the grid and the window of the plan",
      { kind: "no-input" },
    );
  }
  tellSpread(layers, (what) =>
    log.add("doubted", { what, where: MAP_FILE, fix: "narrow the window, or switch a radar off" }),
  );
  const values = blendRates(layers, grid.nx * grid.ny);
  mkdirSync(folder, { recursive: true });
  await writeWhole(path.join(folder, MAP_FILE), (draft) =>
    writeGeoTiff(draft, { grid, projString: map.projString, values, description: "rain_rate", unit: "mm/h" }),
  );
  log.finish();
  const facts = factsOf(layers, values, inputs, log.all);
  await writeWhole(path.join(folder, FACTS_FILE), (draft) => writeJson(draft, facts as unknown as JsonValue));
  if (terminal.json) terminal.result(JSON.stringify(facts));
  else terminal.result(rateText(facts, out));
  return log.count;
}

/** A map of rates takes no part in resuming runs: its folder must be new, or empty. */
function freshFolder(out: string): string {
  const folder = path.resolve(out);
  if (!existsSync(folder) || readdirSync(folder).length === 0) return folder;
  throw new InputError("the folder holds something already", out, "name a new or empty folder", {
    kind: "usage",
  });
}

async function writeWhole(file: string, write: (draft: string) => Promise<void>): Promise<void> {
  const draft = `${file}.part`;
  await write(draft);
  renameSync(draft, file);
}

/** The last round that a radar finished within the window; the first one where all lie after it. */
function roundOf(
  { rounds }: RadarInput,
  radar: JobRadar,
  toMs: number,
): { radar: JobRadar; round: JobRound }[] {
  const within = rounds.findLastIndex(({ sweeps }) => sweeps.every((sweep) => midEpochMs(sweep) <= toMs));
  const round = radar.rounds[Math.max(within, 0)];
  return round === undefined ? [] : [{ radar, round }];
}

function tellSpread(layers: readonly RateLayerOfRadar[], tell: (what: string) => void): void {
  // A radar's own sweeps of one round count as one instant, that of its lowest.
  const instants = layers.map(({ sweepMidEpochMs }) => sweepMidEpochMs[0] as number);
  const spreadMs = Math.max(...instants) - Math.min(...instants);
  if (spreadMs <= ONE_INSTANT_MS) return;
  tell(`the radars looked ${decimals(spreadMs / 60_000, 1)} minutes apart: the map shows no single instant`);
}

type RateFacts = ReturnType<typeof factsOf>;

function factsOf(
  layers: readonly RateLayerOfRadar[],
  values: Float32Array,
  inputs: readonly ManifestInput[],
  notices: ReturnType<typeof leftOutLog>["all"],
) {
  let observedCells = 0;
  let maxRate = 0;
  for (const value of values) {
    if (Number.isNaN(value)) continue;
    observedCells++;
    maxRate = Math.max(maxRate, value);
  }
  return {
    format: "rainreckon-rate-1" as const,
    file: MAP_FILE,
    unit: "mm/h",
    radars: layers.map(({ radar, sweepMidEpochMs, counts }) => ({
      id: radar.site.id,
      instants: sweepMidEpochMs.map(isoUtc),
      gatesCapped: counts.gatesCapped,
      echo: radar.echo === undefined ? null : echoFacts(counts),
    })),
    cellCount: values.length,
    observedCells,
    maxRateMmPerHour: observedCells === 0 ? null : Number(maxRate.toFixed(3)),
    inputs: [...inputs].sort((a, b) => (a.path < b.path ? -1 : 1)),
    notices: [...notices],
  };
}

/** What was done to the echo, in gates. */
function echoFacts(counts: UnitCounts) {
  return {
    gatesWithEcho: counts.gatesWithEcho,
    screened: Object.fromEntries(SCREENS.map((screen, k) => [screen, counts.gatesScreened[k]])),
    filled: counts.gatesFilled,
    lostInAttenuation: counts.gatesLostInAttenuation,
    blocked: counts.gatesBlocked,
    hail: counts.gatesHail,
    melting: counts.gatesMelting,
    snow: counts.gatesSnow,
  };
}

function screenedText(echo: ReturnType<typeof echoFacts> | null): string {
  if (echo === null || echo.gatesWithEcho === 0) return "";
  const screened = Object.values(echo.screened).reduce((sum, gates) => sum + gates, 0);
  return `, ${decimals((100 * screened) / echo.gatesWithEcho, 1)} % of its echo taken for no rain`;
}

function rateText(facts: RateFacts, out: string): string {
  const share = (100 * facts.observedCells) / facts.cellCount;
  return [
    "Rain rate at one instant per radar; this is no total",
    ...facts.radars.map(({ id, instants, gatesCapped, echo }) => {
      const first = utcText(Date.parse(instants[0] as string));
      return `  ${displayText(id)}: ${first}, ${counted(instants.length, "sweep")}, ${counted(gatesCapped, "gate")} at cap${screenedText(echo)}`;
    }),
    `  highest cell ${decimals(facts.maxRateMmPerHour ?? 0, 1)} mm/h; ${decimals(share, 1)} % of the grid observed`,
    `  ${displayText(path.join(out, MAP_FILE))}, ${FACTS_FILE} beside it`,
  ].join("\n");
}
