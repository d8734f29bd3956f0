import { type CellFractions, durationMs } from "@rainreckon/accumulation";
import { CHOICE_RULE, CLUSTER_RULE, METHOD_TITLES } from "@rainreckon/adjustment";
import { RELATIONS } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import type {
  AccountLine,
  DepthFigure,
  RelationFigure,
  ReportAsset,
  ReportCatchment,
  ReportGauge,
  ReportInput,
  ReportScore,
} from "@rainreckon/report";
import type { ScoreTable } from "@rainreckon/verification";
import { radarCauseWords } from "../check/trust.ts";
import type { ManifestNotice } from "../manifest.ts";
import type { PlanRadar } from "../plan/schema.ts";
import { countText, lengthText } from "../ui/numbers.ts";
import { version } from "../version.ts";
import { type ComparedGauge, type Comparison, crossValidatedPairMm } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import { districtMean, type RunCaution } from "./cautions.ts";
import { changedSettings } from "./changed-settings.ts";
import { relationOf } from "./conversion.ts";
import { echoAccount, wordsByRadar } from "./echo-account.ts";
import {
  type ArealFigure,
  bestMm,
  districtFigure,
  headlineUnderRelations,
  isAtCap,
  windowFigure,
} from "./figures.ts";
import { reasonOf } from "./outputs.ts";
import { rangeOf3x3 } from "./place-planes.ts";
import type { PreparedRun } from "./prepare.ts";
import { reportMap } from "./report-map.ts";
import { areaHyetograph, gaugeHyetograph } from "./report-series.ts";
import { areaRanges, cellRange, type Uncertainty } from "./uncertainty.ts";
import { uncertaintyWords } from "./uncertainty-words.ts";
import type { UnitStore } from "./unit-store.ts";

interface ReportSources {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
  readonly cautions: readonly RunCaution[];
  readonly adjustedTotalMm: Float32Array | undefined;
  readonly notices: readonly ManifestNotice[];
  readonly store: UnitStore;
  readonly uncertainty: Uncertainty;
}

/** Assets that the report's map shows; assets.csv has them all. */
const MOST_ASSETS = 200;

/** All that the report says, from what a run came to. */
export function reportInput(sources: ReportSources): ReportInput {
  const { run, total, comparison, cautions } = sources;
  const { plan } = run.loaded;
  const { adjustment, choice } = comparison;
  const district = districtFigure(sources);
  const figure = (areal: ArealFigure, mm: number): DepthFigure => {
    const reason = reasonOf({ figure: areal }, plan.rain.minObserved);
    return {
      mm,
      observedFraction: areal.observedFraction,
      atCap: isAtCap(areal),
      ...(reason === "" ? {} : { reason }),
    };
  };
  return {
    title: plan.title,
    reference: plan.reference,
    author: plan.author,
    status: plan.status,
    window: run.window,
    zone: plan.window.zone,
    minObserved: plan.rain.minObserved,
    headline: {
      place: run.catchments.length > 0 ? "The catchments together" : "The map",
      depth: figure(district, bestMm(district)),
      basis: adjustment.applied ? "adjusted" : "radar",
      ...rangeOf(run.district, sources),
    },
    adjustment: adjustment.applied
      ? {
          applied: true,
          method: Number.isNaN(adjustment.factor)
            ? `${adjustment.title}, over the whole place`
            : adjustment.title,
          factor: Number.isNaN(adjustment.factor)
            ? district.adjustedMm / district.radarMm
            : adjustment.factor,
          limited: adjustment.unlimitedFactor !== undefined,
        }
      : { applied: false, reason: adjustment.reason },
    crossValidation: crossValidationStatement(comparison),
    ...(choice === undefined
      ? {}
      : {
          methodChoice: {
            rule: CHOICE_RULE,
            clusterRule: CLUSTER_RULE,
            chosen: METHOD_TITLES[choice.chosen],
            outerErrorMm: choice.validation.errorMm,
            outerClusterErrorMm: choice.clusterValidation.errorMm,
            candidates: choice.candidates.map(({ name, ...candidate }) => ({
              ...candidate,
              title: METHOD_TITLES[name],
              chosenInFolds: choice.chosenInFolds.get(name) ?? 0,
            })),
          },
        }),
    cautions,
    howSure: sources.uncertainty.known ? uncertaintyWords(sources.uncertainty) : [],
    ...reportMap(sources),
    assets: run.assets.slice(0, MOST_ASSETS).map((asset, k) => assetOf(asset, k, figure, sources)),
    assetsLeftOut: Math.max(0, run.assets.length - MOST_ASSETS),
    radars: run.shape.radars
      .map(({ site }) => {
        const [xM, yM] = run.map.forward(site.lonDeg, site.latDeg);
        return { id: site.id, xM, yM, ...(site.name === undefined ? {} : { name: site.name }) };
      })
      .concat(
        // Gridded rain speaks in cells as radars do, but stands nowhere.
        run.shape.grids.map(({ id }) => ({ id, xM: Number.NaN, yM: Number.NaN, name: "gridded rain" })),
      ),
    gauges: comparison.gauges.map((gauge) => reportGauge(gauge, comparison)),
    radarVerdicts: comparison.radars.map(({ radarId, verdict, cause, sentence }) => ({
      radarId,
      verdict,
      cause: radarCauseWords(cause),
      sentence,
    })),
    catchments: run.catchments.map((catchment): ReportCatchment => {
      const areal = windowFigure(catchment.cells, sources);
      return {
        id: catchment.id,
        name: catchment.name,
        polygons: catchment.polygons,
        depth: figure(areal, bestMm(areal)),
        radar: figure(areal, areal.radarMm),
        ...(adjustment.applied ? { adjusted: figure(areal, areal.adjustedMm) } : {}),
        maxCell: { ...figure(areal, areal.maxCellMm), atCap: peakAtCap(catchment.cells, total.sum) },
        areaKm2: catchment.areaKm2,
        ...rangeOf(catchment.cells, sources),
      };
    }),
    gaugeHyetographs: comparison.gauges.map((gauge, g) => gaugeHyetograph(gauge, g, sources)),
    catchmentHyetographs: run.catchments.map((catchment, a) =>
      areaHyetograph(catchment, a, windowFigure(catchment.cells, sources).adjustedMm, sources),
    ),
    relations: relationFigures(sources, district),
    scores: {
      pairs: `pairs over ${lengthText(durationMs(plan.pairs.interval))}, on the time that gauge and radar both observed`,
      radar: reportScores(comparison.before),
      crossValidated: "whole" in comparison.after ? reportScores(comparison.after) : [],
    },
    ...echoStatement(sources),
    accounts: accountsOf(sources),
    provenance: {
      software: `rainreckon ${version()}`,
      runDigest: run.runDigest,
      planDigest: run.loaded.digest,
      inputs: run.inputs.map(({ path, kind, sha256, use, reason }) => ({
        path,
        kind,
        sha256,
        use: reason === undefined ? use : `${use}: ${reason}`,
      })),
      changedSettings: changedSettings(plan),
    },
  };
}

/** Whether the deepest cell of an area met the cap: one hailstone's cell is lost in the depth of a whole area. */
function peakAtCap({ cells }: CellFractions, { depthMm, cappedMm }: AssembledRun["sum"]): boolean {
  let deepest = -1;
  for (const cell of cells) {
    if (depthMm[cell] > (deepest < 0 ? -1 : depthMm[deepest])) deepest = cell;
  }
  return deepest >= 0 && cappedMm[deepest] > 0;
}

function crossValidationStatement({ adjustment, choice }: Comparison): ReportInput["crossValidation"] {
  if (!adjustment.applied) return { reason: `no adjustment: ${adjustment.reason}` };
  const { errorMm, errorPercent } = adjustment.crossValidation;
  if (!Number.isFinite(errorMm)) return { reason: "no gauge could be left out" };
  const without = choice === undefined ? "" : ", from the choice of a method too";
  return {
    errorMm,
    errorPercent,
    what: `root mean square error of window depths at gauges, each gauge left out in turn${without}`,
  };
}

function reportGauge(compared: ComparedGauge, comparison: Comparison): ReportGauge {
  const { gauge, verdict, whole } = compared;
  const { series, station } = gauge;
  return {
    network: series.network,
    id: series.id,
    ...(station.name === undefined ? {} : { name: station.name }),
    xM: gauge.xM,
    yM: gauge.yM,
    role: whole.used ? "used" : verdict.verdict === "leave out" ? "doubted" : "left-out",
    gaugeMm: whole.gaugeMm,
    radarMm: whole.radarMm,
    crossValidatedMm: crossValidatedPairMm(comparison, compared, whole),
    commonFraction: whole.commonFraction,
    ...(whole.radarId === "" ? {} : { radarId: whole.radarId }),
    ...(Number.isNaN(whole.rangeKm) ? {} : { rangeKm: whole.rangeKm }),
    verdict: verdict.verdict,
    cause: verdict.cause?.words ?? "",
    evidence: verdict.evidence,
    ...(whole.reason === "" ? {} : { reason: whole.reason }),
  };
}

/** Bounds of the depth of an area; none where nothing tells of errors. */
function rangeOf(
  area: PreparedRun["district"],
  { run, uncertainty }: ReportSources,
): Pick<ReportCatchment, "range"> {
  return uncertainty.known ? boundsOf(areaRanges(run, uncertainty, area).window) : {};
}

function boundsOf({
  p10Mm,
  p90Mm,
}: {
  readonly p10Mm: number;
  readonly p90Mm: number;
}): Pick<ReportCatchment, "range"> {
  return Number.isFinite(p10Mm) && Number.isFinite(p90Mm) ? { range: { p10Mm, p90Mm } } : {};
}

/** An asset: the figures of its cell, and the range of the nine cells about it. */
function assetOf(
  asset: PreparedRun["assets"][number],
  k: number,
  figure: (areal: ArealFigure, mm: number) => DepthFigure,
  sources: ReportSources,
): ReportAsset {
  const { run, total, adjustedTotalMm } = sources;
  const areal = windowFigure(asset.cells, sources);
  const around = rangeOf3x3(run.grid, adjustedTotalMm ?? total.planes.totalMm, asset.cell);
  const [xM, yM] = run.map.forward(asset.lonDeg, asset.latDeg);
  return {
    id: asset.id,
    ...(asset.name === "" ? {} : { name: asset.name }),
    xM,
    yM,
    depth: figure(areal, bestMm(areal)),
    ...(around === undefined ? {} : { nineCells: around }),
    ...(sources.uncertainty.known ? boundsOf(cellRange(sources.uncertainty, asset.cell, bestMm(areal))) : {}),
    series: areaHyetograph(asset, run.catchments.length + k, areal.adjustedMm, sources),
  };
}

/** The headline under the catalogue relations of the plan, and under its own where that is another. */
function relationFigures(sources: ReportSources, district: ArealFigure): RelationFigure[] {
  const { run } = sources;
  const { plan } = run.loaded;
  const inUse: readonly Pick<PlanRadar, "relation" | "periods">[] = [
    ...plan.radars.filter(({ use }) => use),
    ...plan.grids
      .filter(({ use, quantity }) => use && quantity === "reflectivity")
      .map(({ relation }) => ({ relation, periods: [] })),
  ];
  const used = inUse.map(({ relation }) => relation);
  // With a relation of its own for some radar or period, the headline stands under none of those listed.
  const onlyOne =
    inUse.every(({ periods }) => periods.length === 0) &&
    new Set(used.map((relation) => JSON.stringify(relation))).size === 1;
  const own = used[0];
  const figures = headlineUnderRelations(sources).map(({ name, mm, observedFraction }): RelationFigure => {
    const known = RELATIONS.find((relation) => relation.name === name);
    if (known === undefined) throw new RangeError(`no relation ${name} in the catalogue`);
    const { a, b, regime } = known;
    return { name, a, b, regime, depth: { mm, observedFraction }, inUse: onlyOne && own === name };
  });
  if (onlyOne && own !== undefined && !figures.some(({ inUse }) => inUse)) {
    const { a, b } = relationOf(own);
    const known = typeof own === "string" ? RELATIONS.find((relation) => relation.name === own) : undefined;
    figures.unshift({
      name: typeof own === "string" ? own : `the plan's own (${displayText(own.source)})`,
      a,
      b,
      regime: known?.regime ?? "as the plan says",
      depth: { mm: district.radarMm, observedFraction: district.observedFraction },
      inUse: true,
    });
  }
  return figures;
}

function reportScores(table: ScoreTable): ReportScore[] {
  return [
    ...table.whole.continuous.map((score) => ({ score })),
    ...table.whole.thresholds.flatMap(({ thresholdMm, scores }) =>
      scores.map((score) => ({ score, thresholdMm })),
    ),
  ];
}

function echoStatement({ run, total, comparison }: ReportSources): Pick<ReportInput, "echo"> {
  const account = echoAccount(run, total, comparison);
  if (account === undefined) return {};
  return {
    echo: {
      screens: account.screens.map(({ screen, ...toll }) => ({ name: screen.replaceAll("-", " "), ...toll })),
      corrections: account.corrections.map(({ correction, ...effect }) => ({ name: correction, ...effect })),
      profile: account.profile,
      radars: wordsByRadar(account).map(([id, statements]) => ({ id, statements })),
    },
  };
}

/** Which deed a notice's kind stands for. */
function deedOf(kind: string): AccountLine["deed"] {
  if (kind === "assumed") return "assumed";
  if (kind === "doubted") return "flagged";
  if (kind.startsWith("gauge data")) return "flagged";
  return "left out";
}

function depthText(mm: number): string {
  return mm < 0.005 ? "less than 0.01 mm" : `${mm.toFixed(2)} mm`;
}

/** What the run did to its input, counted: from its own counters and from every notice. */
function accountsOf({ run, total, comparison, notices }: ReportSources): AccountLine[] {
  const { counts } = total;
  const lines: AccountLine[] = [];
  const add = (deed: AccountLine["deed"], what: string, count: number, unit: string, why: string) => {
    if (count > 0) lines.push({ deed, what, count, unit, why });
  };
  for (const { kind, what, where, fix, count } of notices) {
    add(deedOf(kind), `${kind}: ${what}`, count, "times", `${where}; ${fix}`);
  }
  // Where the sensitivity of a radar is not known there is no figure, and so no cell.
  const unseen = total.unseenMm.filter((mm) => mm > 0);
  const worstMm = unseen.reduce((most, mm) => Math.max(most, mm), 0);
  add(
    "flagged",
    "dry time in which rain just below detection could have fallen",
    unseen.length,
    "cells",
    `rain the radars could not have seen: up to ${depthText(districtMean(run, total.unseenMm))} over the district, ${depthText(worstMm)} in the worst cell`,
  );
  add(
    "capped",
    "rain rate held at the hail cap",
    counts.gatesCapped,
    "gates",
    `of ${countText(counts.gatesRead).replaceAll(",", "\u202f")} gates read`,
  );
  add(
    "filled",
    "gates that were screened and take the rain of their neighbours",
    counts.gatesFilled,
    "gates",
    "plan: echo.screening.fill",
  );
  add(
    "left out",
    "gates behind more attenuation than can be corrected: not observed",
    counts.gatesLostInAttenuation,
    "gates",
    "another radar or a later round may see the place",
  );
  add(
    "left out",
    "gates behind more terrain than is corrected: not observed",
    counts.gatesBlocked,
    "gates",
    "plan: echo.blockage.limit",
  );
  add("flagged", "gates taken for hail", counts.gatesHail, "gates", "their rain is not what their echo says");
  add("flagged", "gates mostly in melting snow", counts.gatesMelting, "gates", "brought down by the profile");
  add("flagged", "gates mostly in snow", counts.gatesSnow, "gates", "brought down by the profile");
  add(
    "flagged",
    "gates with weak echo beside an intense core, which side lobes may have made",
    counts.gatesBesideCores,
    "gates",
    "kept as rain",
  );
  add(
    "capped",
    "rain rate of gridded reflectivity held at the hail cap",
    counts.gridCellsCapped,
    "cells",
    `of ${countText(counts.gridCellsRead).replaceAll(",", "\u202f")} cells of gridded files read`,
  );
  add(
    "filled",
    "a cell spoken for by a higher sweep, since the lowest did not observe it",
    counts.cellsFilledByHigherSweep,
    "cells",
    "summed over all rounds",
  );
  if (comparison.splitMm > 0) {
    lines.push({
      deed: "assumed",
      what: `${comparison.splitMm.toFixed(1)} mm of gauge readings cross a border of steps and were shared out by time`,
      count: 1,
      unit: "times",
      why: "rain is taken to be even within one reading",
    });
  }
  for (const { network, counts: c } of run.gauges.counts) {
    const where = `network ${network}`;
    add("left out", "gauge readings missing in their files", c.missing, "readings", where);
    add("left out", "gauge readings that cannot be true", c.impossible, "readings", where);
    add(
      "left out",
      "gauge rows given twice with other values: the first counts",
      c.duplicatesDifferent,
      "readings",
      where,
    );
    add("left out", "gauge rows given twice alike: counted once", c.duplicatesSame, "readings", where);
    add("left out", "stamps in an hour that the clock skipped", c.skippedHour, "stamps", where);
    add(
      "left out",
      "stamps in an hour that the clock repeated, not told apart",
      c.repeatedHourLeftOut,
      "stamps",
      where,
    );
    add(
      "assumed",
      "stamps in an hour that the clock repeated, told apart by their order",
      c.repeatedHourResolved,
      "stamps",
      where,
    );
    add("flagged", "gauge readings that their network doubts", c.qualityDoubt, "readings", where);
    add("left out", "gauge readings that their network drops", c.qualityDrop, "readings", where);
    add("corrected", "counter resets", c.counterResets, "readings", where);
    add("corrected", "counter jitter", c.counterJitter, "readings", where);
    add("assumed", "silent hours taken to be dry", Math.round(c.silentDryHours), "gauge hours", where);
  }
  return lines;
}
