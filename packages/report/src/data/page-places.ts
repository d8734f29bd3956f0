import { ROLE_WORDS } from "../charts/marks.ts";
import { coarsen, stepCount } from "../charts/steps.ts";
import type {
  DepthFigure,
  Hyetograph,
  ReportAsset,
  ReportCatchment,
  ReportGauge,
  ReportInput,
} from "../input.ts";
import { depthWords, isPartial, rangeWords } from "../text/figures.ts";
import { plainText } from "../text/html.ts";
import { areaText, mmText, percentText, ratioText } from "../text/numbers.ts";
import type { PagePlace, PageSeries } from "./contract.ts";

/** Numbers of all series together that the page holds, and steps of one that can be told apart. */
const MOST_NUMBERS = 240_000;
const MOST_PANEL_STEPS = 288;

/** Whatever on the map can be picked, with what is known of it. */
export function placesOf(input: ReportInput): PagePlace[] {
  const all = [
    ...input.gaugeHyetographs,
    ...input.catchmentHyetographs,
    ...(input.assets ?? []).flatMap(({ series }) => series ?? []),
  ];
  const sides = all.reduce((sum, graph) => sum + graph.sides.length, 0);
  const most = Math.max(24, Math.min(MOST_PANEL_STEPS, Math.floor(MOST_NUMBERS / Math.max(1, sides))));
  const seriesOf = (graph: Hyetograph | undefined) =>
    graph === undefined ? {} : { series: pageSeries(graph, most) };
  return [
    ...input.catchments.map((catchment, i) => ({
      ...catchmentPlace(catchment, i, input),
      ...seriesOf(input.catchmentHyetographs[i]),
    })),
    ...input.gauges.map((gauge, i) => ({ ...gaugePlace(gauge, i), ...seriesOf(input.gaugeHyetographs[i]) })),
    ...input.radars.flatMap(({ id, name, xM, yM }, i) =>
      Number.isFinite(xM) && Number.isFinite(yM)
        ? [
            {
              ...plainPlace(`r${i}`, "radar", id, name, xM, yM),
              facts: fact(
                "Gauges nearest to it",
                String(input.gauges.filter(({ radarId }) => radarId === id).length),
              ),
              cautions: [],
            },
          ]
        : [],
    ),
    ...(input.assets ?? []).map((asset, i) => ({
      ...assetPlace(asset, i, input.minObserved),
      ...seriesOf(asset.series),
    })),
  ];
}

function plainPlace(
  key: string,
  kind: PagePlace["kind"],
  id: string,
  name: string | undefined,
  xM: number,
  yM: number,
): Omit<PagePlace, "facts" | "cautions"> {
  const word = kind.charAt(0).toUpperCase() + kind.slice(1);
  return {
    key,
    kind,
    title: plainText(`${word} ${id}`),
    subtitle: plainText(name === undefined || name === id ? "" : name),
    xM,
    yM,
  };
}

type Facts = (readonly [label: string, text: string])[];

/** A fact where there is something to say. */
function fact(label: string, text: string | undefined): Facts {
  return text === undefined || text === "" ? [] : [[label, plainText(text)]];
}

function mmFact(label: string, mm: number, otherwise: string): Facts {
  return fact(label, Number.isFinite(mm) ? `${mmText(mm)} mm` : otherwise);
}

function gaugePlace(gauge: ReportGauge, index: number): PagePlace {
  const why = gauge.reason ?? "gauge and radar observed no time together";
  const { gaugeMm, radarMm } = gauge;
  return {
    ...plainPlace(`g${index}`, "gauge", gauge.id, gauge.name, gauge.xM, gauge.yM),
    subtitle: plainText([gauge.name, gauge.network].filter((words) => words !== undefined).join(", ")),
    facts: [
      ...fact("Verdict", gauge.verdict),
      ...fact("Part in the figures", ROLE_WORDS[gauge.role]),
      ...fact("Likely cause", gauge.cause),
      ...fact("Evidence", gauge.evidence),
      ...mmFact("Gauge", gaugeMm, `– (${why})`),
      ...mmFact("Radar", radarMm, `– (${why})`),
      ...fact("radar/gauge", radarMm >= 0 && gaugeMm > 0 ? ratioText(radarMm / gaugeMm) : ""),
      ...mmFact("Adjusted without it", gauge.crossValidatedMm, ""),
      ...fact(
        "Time that both observed",
        Number.isFinite(gauge.commonFraction) ? percentText(gauge.commonFraction) : "",
      ),
      ...fact(
        "Seen by",
        gauge.radarId === undefined
          ? ""
          : `${gauge.radarId}${gauge.rangeKm === undefined ? "" : `, ${Math.round(gauge.rangeKm)} km away`}`,
      ),
    ],
    cautions: [
      ...(gauge.role === "used" ? [] : ["This gauge takes no part in the adjustment and the scores."]),
      "A gauge measures a few hundred square centimetres, a cell of the map a great deal more.",
    ],
  };
}

function catchmentPlace(catchment: ReportCatchment, index: number, input: ReportInput): PagePlace {
  const { minObserved } = input;
  const { depth, radar, adjusted, maxCell, range, areaKm2 } = catchment;
  const words = (figure: DepthFigure) => depthWords(figure, minObserved);
  const middle = middleOf(catchment);
  return {
    ...plainPlace(`c${index}`, "catchment", catchment.id, catchment.name, middle.xM, middle.yM),
    title: plainText(catchment.name),
    subtitle: plainText(catchment.name === catchment.id ? "Catchment" : `Catchment ${catchment.id}`),
    facts: [
      ...fact("Depth", words(depth)),
      ...(range === undefined
        ? []
        : fact("In 8 cases of 10 between", `${rangeWords(range, " and ")} mm (p10–p90)`)),
      ...fact("Observed, of area and time", percentText(depth.observedFraction)),
      ...fact("Radar alone", words(radar)),
      ...(adjusted === undefined ? [] : fact("Adjusted", words(adjusted))),
      ...fact("Wettest cell", words(maxCell)),
      ...fact("Area", `${areaText(areaKm2)} km²`),
    ],
    cautions: marksOf(depth, minObserved),
    ...(range === undefined ? {} : { range: [range.p10Mm, range.p90Mm] as const }),
  };
}

function assetPlace(
  { id, name, xM, yM, depth, range, nineCells }: ReportAsset,
  index: number,
  minObserved: number,
): PagePlace {
  return {
    ...plainPlace(`a${index}`, "asset", id, name, xM, yM),
    facts: [
      ...(depth === undefined ? [] : fact("Depth of its cell", depthWords(depth, minObserved))),
      ...(range === undefined
        ? []
        : fact("In 8 cases of 10 between", `${rangeWords(range, " and ")} mm (p10–p90)`)),
      ...(nineCells === undefined
        ? []
        : fact("The nine cells about it", `${mmText(nineCells.leastMm)} to ${mmText(nineCells.mostMm)} mm`)),
      ...(depth === undefined ? [] : fact("Observed, of the time", percentText(depth.observedFraction))),
    ],
    cautions: [
      "A single cell of the map is less certain than a mean over a catchment.",
      ...marksOf(depth, minObserved),
    ],
    ...(range === undefined ? {} : { range: [range.p10Mm, range.p90Mm] as const }),
  };
}

/** Cautions that a depth carries. */
function marksOf(depth: DepthFigure | undefined, minObserved: number): string[] {
  if (depth === undefined) return [];
  return [
    ...(depth.reason === undefined || depth.reason === "" ? [] : [plainText(depth.reason)]),
    ...(isPartial(depth, minObserved)
      ? ["Part was not observed: the true depth is at least what is printed."]
      : []),
    ...(depth.atCap === true ? ["At cap: a capped rain rate went into it, so it may be too low."] : []),
  ];
}

/** A point to fly the cursor to: the middle of the first ring's box. */
function middleOf({ polygons }: ReportCatchment): { xM: number; yM: number } {
  const ring = polygons[0]?.[0] ?? [];
  const xs = ring.map(([x]) => x);
  const ys = ring.map(([, y]) => y);
  return ring.length === 0
    ? { xM: 0, yM: 0 }
    : { xM: (Math.min(...xs) + Math.max(...xs)) / 2, yM: (Math.min(...ys) + Math.max(...ys)) / 2 };
}

function pageSeries(graph: Hyetograph, most: number): PageSeries {
  const shown = coarsen(graph, most);
  return {
    startEpochMs: shown.startEpochMs,
    stepMs: shown.stepMs,
    joined: stepCount(shown) < stepCount(graph),
    sides: shown.sides.map(({ role, depthMm, observedFraction }) => ({
      role,
      centiMm: Array.from(depthMm, (mm) => (Number.isFinite(mm) ? Math.round(mm * 100) : null)),
      partly: Array.from(depthMm, (mm, step) => [step, mm] as const).flatMap(([step, mm]) => {
        const percent = Math.floor(100 * observedFraction[step] + 0.05);
        return Number.isFinite(mm) && percent < 100 ? [[step, percent] as const] : [];
      }),
    })),
  };
}
