import { ticks } from "d3-array";
import { SIDE_WORDS } from "../charts/sides.ts";
import type { PageSeries } from "../data/contract.ts";
import { depthText, MM_PER_INCH, type Unit } from "./depths.ts";
import { el, svg } from "./dom.ts";
import type { Clock } from "./times.ts";

const LEFT = 40;
const RIGHT = 14;
const PANEL = 118;
const TOP = 22;
const GAP = 48;
const BOTTOM = 24;
const SUMS_TOP = TOP + PANEL + GAP;
const HEIGHT = SUMS_TOP + PANEL + BOTTOM;

type Side = PageSeries["sides"][number];

export interface ChartSettings {
  readonly id: string;
  readonly title: string;
  readonly unit: Unit;
  readonly clock: Clock;
  /** Pixels of the page that it has. */
  readonly width: number;
  /** Bounds of the sum, mm. */
  readonly range?: readonly [number, number];
}

/** A chart on the page. */
export interface SeriesChart {
  readonly element: HTMLElement;
  /** Draws the interval that the map shows as a band; undefined takes it away. */
  showBand(band: readonly [startEpochMs: number, endEpochMs: number] | undefined): void;
}

/** Rain by step over its running sums, on one time axis, with a cursor that says what stands where. */
export function seriesChart(series: PageSeries, settings: ChartSettings): SeriesChart {
  const { unit, clock, title, id, width } = settings;
  const inner = width - LEFT - RIGHT;
  const scale = unit === "mm" ? 100 : 100 * MM_PER_INCH;
  const sides = series.sides.map((side) => ({
    ...side,
    depths: side.centiMm.map((centi) => (centi === null ? Number.NaN : centi / scale)),
  }));
  const count = Math.max(0, ...sides.map(({ depths }) => depths.length));
  const sums = sides.map(({ depths }) => running(depths));
  const x = (step: number) => LEFT + (inner * step) / Math.max(1, count);
  const end = series.startEpochMs + count * series.stepMs;
  const deepest = Math.max(
    unit === "mm" ? 0.5 : 0.02,
    ...sides.flatMap(({ depths }) => depths.filter(Number.isFinite)),
  );
  const range = settings.range?.map((mm) => (mm * 100) / scale);
  const highest = Math.max(deepest, ...sums.flat().filter(Number.isFinite), ...(range ?? []));
  const y = (top: number, most: number) => (value: number) => top + PANEL - (PANEL * value) / most;
  const [yDepth, ySum] = [y(TOP, deepest * 1.05), y(SUMS_TOP, highest * 1.05)];
  const minutes = series.stepMs / 60_000;

  const bands = [TOP, SUMS_TOP].map((top) => svg("rect", { class: "band", y: top, height: PANEL, width: 0 }));
  const drawing = svg(
    "svg",
    { class: "chart series", viewBox: `0 0 ${width} ${HEIGHT}`, "aria-hidden": "true" },
    ...bands,
    axis(yDepth, deepest * 1.05, TOP, `${unit} per ${minutes} minutes`, width),
    axis(ySum, highest * 1.05, SUMS_TOP, `${unit} since the start`, width),
    svg(
      "g",
      { class: "axis" },
      ...clock.ticks(series.startEpochMs, end, Math.max(4, inner / 80)).flatMap(({ epochMs, label }) => {
        const tx = x((epochMs - series.startEpochMs) / series.stepMs);
        const anchor = tx > width - 16 ? "end" : "middle";
        return [SUMS_TOP + PANEL, TOP + PANEL].flatMap((floor) => [
          svg("path", { d: `M${tx} ${floor}v4` }),
          svg("text", { x: tx, y: floor + 16, "text-anchor": anchor }, label),
        ]);
      }),
    ),
    ...sides.flatMap(({ role, depths }, at) => [
      gaps(depths, x, at),
      at === 0
        ? svg("path", { class: `bars ${role}`, d: bars(depths, x, yDepth) })
        : svg("path", { class: `step-line ${role}`, d: stepLine(depths, x, yDepth) }),
      svg("path", { class: `step-line sum ${role}`, d: sumLine(sums[at], x, ySum) }),
    ]),
    ...(range === undefined ? [] : rangeMark(range as [number, number], ySum, width)),
  );
  const line = svg("path", { class: "series-cursor", visibility: "hidden" });
  drawing.append(line);

  const said = el("p", { class: "series-words" });
  const holder = el(
    "div",
    {
      class: "series-holder",
      tabindex: 0,
      role: "slider",
      id,
      "aria-label": `Step of the chart: ${title}`,
      "aria-valuemin": 1,
      "aria-valuemax": Math.max(1, count),
    },
    drawing,
  );
  const wordsAt = (step: number) => {
    const at = clock.instant(series.startEpochMs + (step + 1) * series.stepMs);
    const parts = sides.map(({ role, centiMm, partly }, k) => {
      const centi = centiMm[step];
      if (centi === null || centi === undefined) return `${SIDE_WORDS[role]} not observed`;
      const share = partly.find(([which]) => which === step)?.[1];
      const depth = `${share === undefined ? "" : "≥ "}${depthText(centi / 100, unit)}`;
      const sum = depthText((sums[k][step] * scale) / 100, unit);
      return `${SIDE_WORDS[role]} ${depth} ${unit}${share === undefined ? "" : ` (${share} % seen)`}, so far ${sum}`;
    });
    return `Ending ${at}: ${parts.join("; ")}`;
  };
  const sumWords = sides.map(({ role, depths }, k) => {
    const known = sums[k].filter(Number.isFinite);
    const hole = depths.some(Number.isNaN) ? "≥ " : "";
    return `${SIDE_WORDS[role]} ${known.length === 0 ? "not observed" : `${hole}${depthText((known[known.length - 1] * scale) / 100, unit)} ${unit}`}`;
  });
  let step = -1;
  const move = (to: number) => {
    step = Math.max(0, Math.min(count - 1, to));
    const words = wordsAt(step);
    line.setAttribute(
      "d",
      `M${x(step + 0.5)} ${TOP}V${TOP + PANEL}M${x(step + 0.5)} ${SUMS_TOP}V${SUMS_TOP + PANEL}`,
    );
    line.setAttribute("visibility", "visible");
    said.textContent = words;
    holder.setAttribute("aria-valuenow", String(step + 1));
    holder.setAttribute("aria-valuetext", words);
  };
  const rest = () => {
    line.setAttribute("visibility", "hidden");
    said.textContent = `Sum of the observed steps: ${sumWords.join("; ")}.`;
    holder.setAttribute("aria-valuenow", "1");
    holder.setAttribute("aria-valuetext", said.textContent);
  };
  rest();
  holder.addEventListener("pointermove", (event) => {
    const box = drawing.getBoundingClientRect();
    const at = ((event.clientX - box.left) / box.width) * width;
    move(Math.floor(((at - LEFT) / inner) * count));
  });
  holder.addEventListener("pointerleave", rest);
  holder.addEventListener("blur", rest);
  holder.addEventListener("keydown", (event) => {
    const to = {
      ArrowLeft: step - 1,
      ArrowDown: step - 1,
      ArrowRight: step + 1,
      ArrowUp: step + 1,
      Home: 0,
      End: count - 1,
    }[event.key];
    if (to === undefined) return;
    event.preventDefault();
    move(to);
  });
  return {
    element: el("figure", { class: "series-figure" }, key(sides, settings.range !== undefined), holder, said),
    showBand: (band) => {
      const place = (epochMs: number) =>
        x(Math.max(0, Math.min(count, (epochMs - series.startEpochMs) / series.stepMs)));
      const [from, to] = band === undefined ? [0, 0] : [place(band[0]), place(band[1])];
      for (const rect of bands) {
        rect.setAttribute("x", String(from));
        rect.setAttribute("width", String(Math.max(0, to - from)));
      }
    },
  };
}

/** Sums of the observed steps so far; NaN before the first. */
function running(depths: readonly number[]): number[] {
  let sum = Number.NaN;
  return depths.map((depth) => {
    if (Number.isFinite(depth)) sum = (Number.isNaN(sum) ? 0 : sum) + depth;
    return sum;
  });
}

function axis(
  y: (value: number) => number,
  most: number,
  top: number,
  words: string,
  width: number,
): SVGGElement {
  return svg(
    "g",
    { class: "axis" },
    svg("text", { x: LEFT, y: top - 8 }, words),
    ...ticks(0, most, 4).flatMap((value) => [
      svg("path", { class: "grid-line", d: `M${LEFT} ${y(value)}H${width - RIGHT}` }),
      svg("text", { x: LEFT - 5, y: y(value) + 4, "text-anchor": "end" }, String(value)),
    ]),
    svg("path", { class: "base", d: `M${LEFT} ${top + PANEL}H${width - RIGHT}` }),
  );
}

function bars(depths: readonly number[], x: (step: number) => number, y: (value: number) => number): string {
  return depths
    .map((depth, step) => {
      if (!(depth > 0)) return "";
      const right = Math.max(x(step) + 0.8, x(step + 1) - 0.4);
      return `M${x(step) + 0.4} ${y(0)}V${y(depth)}H${right}V${y(0)}Z`;
    })
    .join("");
}

/** Along the tops of the steps, broken where nothing was observed. */
function stepLine(
  depths: readonly number[],
  x: (step: number) => number,
  y: (value: number) => number,
): string {
  let path = "";
  for (const [step, depth] of depths.entries()) {
    if (Number.isNaN(depth)) continue;
    const joins = step > 0 && Number.isFinite(depths[step - 1]);
    path += `${joins ? `V${y(depth)}` : `M${x(step)} ${y(depth)}`}H${x(step + 1)}`;
  }
  return path;
}

function sumLine(sums: readonly number[], x: (step: number) => number, y: (value: number) => number): string {
  const first = sums.findIndex(Number.isFinite);
  if (first < 0) return "";
  const points = sums.slice(first).map((sum, k) => `L${x(first + k + 1)} ${y(sum)}`);
  return `M${x(first)} ${y(0)}${points.join("")}`;
}

/** Steps without observation, hatched in lines: rising for the first side, falling for the others. */
function gaps(depths: readonly number[], x: (step: number) => number, side: number): SVGPathElement {
  let path = "";
  for (const [step, depth] of depths.entries()) {
    if (Number.isFinite(depth)) continue;
    const [left, right] = [x(step), x(step + 1)];
    for (let top = TOP; top < TOP + PANEL; top += 8) {
      path += side === 0 ? `M${left} ${top + 8}L${right} ${top}` : `M${left} ${top}L${right} ${top + 8}`;
    }
  }
  return svg("path", { class: "hatch-line", d: path });
}

function rangeMark(
  [low, high]: readonly [number, number],
  y: (value: number) => number,
  width: number,
): SVGElement[] {
  const at = width - RIGHT + 5;
  return [
    svg("path", {
      class: "range",
      d: `M${at - 4} ${y(low)}h8M${at} ${y(low)}V${y(high)}M${at - 4} ${y(high)}h8`,
    }),
  ];
}

function key(sides: readonly Side[], hasRange: boolean): HTMLUListElement {
  const item = (picture: SVGElement, words: string) =>
    el(
      "li",
      {},
      svg(
        "svg",
        { class: "swatch", width: 22, height: 14, viewBox: "0 0 22 14", "aria-hidden": "true" },
        picture,
      ),
      words,
    );
  return el(
    "ul",
    { class: "key" },
    ...sides.map(({ role }, at) =>
      item(
        at === 0
          ? svg("path", { class: `bars ${role}`, d: "M4 14V4H10V14ZM12 14V8H18V14Z" })
          : svg("path", { class: `step-line ${role}`, d: "M1 11H8V4H15V9H21" }),
        SIDE_WORDS[role],
      ),
    ),
    hasRange && item(svg("path", { class: "range", d: "M7 2h8M11 2V12M7 12h8" }), "p10 to p90 of the sum"),
  );
}
