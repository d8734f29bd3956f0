import { EFFECTS, type RateMethod } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { decimals, fixedDecimals, placeText, utcText } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type {
  AdjustmentAccount,
  AreaAccount,
  Explanation,
  PartAccount,
  PointAccount,
  ScanAccount,
} from "./schema.ts";

/** Scans shown in full; of more, the first, the last and those that add most. */
const SCANS_SHOWN = 12;
const MOST_ADDING = 8;
const GAUGES_SHOWN = 8;
/** Rows of a catchment's steps that are shown. */
const STEPS_SHOWN = 24;

const CHAIN = [
  "stored value > dBZ > screens > corrections in dB > rate of each gate > mean over the cell's gates",
  "> trapezoids between scans > share of each source > steps > intervals > total",
];

/** An account for people: what the number is, how it was made scan by scan, and that it ends on what is stored. */
export function explainText(explanation: Explanation): string {
  return [
    ...explanation.points.map((point) => pointText(point, explanation)),
    ...explanation.catchments.map((area) => areaText(area, explanation)),
  ]
    .join("\n\n")
    .split("\n")
    .flatMap(wrapped)
    .join("\n");
}

function headLines({ run, span, window, remarks }: Explanation, spanRadarMm: number | null): string[] {
  const isWhole = span.start === window.start && span.end === window.end;
  return [
    `${displayText(run.title)} (${run.status}), ${displayText(run.folder)}`,
    `window: ${instant(window.start)} to ${instant(window.end)}`,
    ...(isWhole
      ? []
      : [
          `below: ${instant(span.start)} to ${instant(span.end)}, with ${fixedDecimals(spanRadarMm, 4)} mm of the radar's depth`,
        ]),
    ...remarks.map((remark) => `note: ${remark}`),
  ];
}

function pointText(point: PointAccount, explanation: Explanation): string {
  const { cell, end, scans, gauge } = point;
  const best = end.adjustedMm ?? end.radarMm;
  const figure = best === null ? "No depth was observed" : `${fixedDecimals(best, 2)} mm`;
  const adjusted = end.adjustedMm === null ? "radar, not adjusted" : "adjusted";
  const added = addedByScan(point.parts);
  const shown = shownScans(scans, added);
  const left = scans.length - shown.size;
  const clock = clockOf(explanation);
  const lines = [
    `${figure} (${adjusted}) at ${point.kind === "gauge" ? "gauge " : ""}${displayText(point.name)}: how it came to be`,
    ...headLines(explanation, end.spanRadarMm),
    `cell: column ${cell.column}, row ${cell.row} of the grid, ${decimals(cell.sizeM, 1)} m wide, centre ${placeText(cell.centreLonDeg, cell.centreLatDeg)}`,
    ...CHAIN,
    "",
    `Scans (${scans.length}), UTC; rays and gates count from 0`,
  ];
  let soFarMm = 0;
  for (const scan of scans) {
    const own = added.get(scan.number);
    soFarMm += own?.mm ?? 0;
    if (!shown.has(scan.number)) continue;
    const beside = gauge === null ? undefined : gaugeSoFar(point, scan);
    lines.push(...scanLines(scan, clock(scan.time), own, soFarMm, beside));
  }
  if (left > 0)
    lines.push(
      `  … ${left} of ${scans.length} scans are left out here: shown are the first, the last and those that add most;`,
      "    --csv and --json hold them all",
    );
  if (point.intervals.length > 0) lines.push("", "Intervals, mm", intervalTable(point));
  if (gauge !== null) lines.push("", ...gaugeLines(gauge));
  lines.push("", ...endLines(end), "", ...adjustmentLines(point.adjustment, end.adjustedMm));
  return lines.join("\n");
}

interface Added {
  readonly mm: number;
  readonly shares: readonly number[];
  readonly kinds: ReadonlySet<PartAccount["kind"]>;
}

/** What the stretches that begin with a scan add, by its number. */
function addedByScan(parts: readonly PartAccount[]): ReadonlyMap<number, Added> {
  const sums = new Map<number, Added>();
  for (const { scan, depthMm, share, kind } of parts) {
    const before = sums.get(scan);
    sums.set(scan, {
      mm: (before?.mm ?? 0) + depthMm,
      shares: [...(before?.shares ?? []), share],
      kinds: new Set([...(before?.kinds ?? []), kind]),
    });
  }
  return sums;
}

/** What the gauge had measured by the end of the last step before a scan; null before there is one. */
function gaugeSoFar({ steps }: PointAccount, { time }: ScanAccount): number | null {
  const before = steps.filter(({ end, gaugeMm }) => gaugeMm !== null && Date.parse(end) <= Date.parse(time));
  return before.length === 0 ? null : before.reduce((sum, { gaugeMm }) => sum + (gaugeMm ?? 0), 0);
}

const KIND_WORDS: Readonly<Record<PartAccount["kind"], string>> = {
  usual: "",
  bridged: " (over a bridged gap)",
  edge: " (half a round beyond the first or last scan among it)",
};

function shownScans(scans: readonly ScanAccount[], added: ReadonlyMap<number, Added>): ReadonlySet<number> {
  if (scans.length <= SCANS_SHOWN) return new Set(scans.map(({ number }) => number));
  const most = scans
    .toSorted(
      (a, b) => (added.get(b.number)?.mm ?? 0) - (added.get(a.number)?.mm ?? 0) || a.number - b.number,
    )
    .slice(0, MOST_ADDING);
  return new Set([scans[0], scans[scans.length - 1], ...most].flatMap((scan) => (scan ? [scan.number] : [])));
}

function scanLines(
  scan: ScanAccount,
  time: string,
  added: Added | undefined,
  soFarMm: number,
  gaugeMm: number | null | undefined,
): string[] {
  const indent = "      ";
  const rate = scan.rateMmPerHour === null ? "not observed" : `${decimals(scan.rateMmPerHour, 3)} mm/h`;
  const depth =
    added === undefined
      ? "no stretch begins with it"
      : `share ${range(added.shares, 2)}, adds ${fixedDecimals(added.mm, 4)} mm${[...added.kinds].map((kind) => KIND_WORDS[kind]).join("")}`;
  const gauge = gaugeMm === undefined ? "" : `, gauge ${fixedDecimals(gaugeMm, 2)}`;
  const lines = [
    `${String(scan.number).padStart(5)} ${time}  ${displayText(scan.source)}  ${rate}; ${depth}; so far ${fixedDecimals(soFarMm, 4)} mm${gauge}`,
  ];
  if (scan.kind === "gridded") {
    const values = scan.gridValues.map(({ value }) => decimals(value ?? Number.NaN, 2)).join(" ");
    lines.push(
      `${indent}gridded rain, ${displayText(scan.file ?? "")}, ${displayText(scan.dataset ?? "")}: no sweep, ray or gate is known`,
      `${indent}values in the cell (${scan.gridQuantity}): ${values}`,
    );
    return lines;
  }
  if (scan.file !== null) {
    lines.push(
      `${indent}${displayText(scan.file)} ${displayText(scan.dataset ?? "")}, ${decimals(scan.elevationDeg ?? Number.NaN, 2)}°, ${decimals(scan.rangeKm ?? Number.NaN, 1)} km, beam at ${decimals(scan.beamHeightAslM ?? Number.NaN, 0)} m above sea`,
      `${indent}ray/gate ${scan.gates.map(({ ray, gate }) => `${ray}/${gate}`).join(" ")}`,
      `${indent}stored ${scan.gates.map(({ stored }) => decimals(stored ?? Number.NaN, 2)).join(" ")}`,
      `${indent}${dbzText(scan)}`,
    );
  }
  for (const { elevationDeg, why } of scan.passedOver)
    lines.push(`${indent}the sweep at ${decimals(elevationDeg, 2)}° did not speak: ${why}`);
  return lines;
}

const METHOD_WORDS: Readonly<Record<RateMethod, string>> = {
  none: "nothing",
  z: "R(Z)",
  "z-zdr": "R(Z, ZDR)",
  attenuation: "R(A)",
  kdp: "R(KDP)",
  "hail-kdp": "R(KDP) under hail",
  "hail-neighbours": "the rain around hail",
};

/** Measured and corrected dBZ, every effect by name, screens, estimator, cap. */
function dbzText({ gates, dropNumberFactor }: ScanAccount): string {
  const words = [`measured ${range(gates.map(({ measuredDbz }) => measuredDbz))} dBZ`];
  for (const effect of EFFECTS) {
    const added = gates.filter(({ dbz }) => dbz !== null).map(({ effectsDb }) => effectsDb[effect]);
    const most = Math.max(0, ...added.map(Math.abs));
    if (most > 0) words.push(`${effect} ${range(added, most < 0.05 ? 3 : 1, true)} dB`);
  }
  const screens = new Map<string, number>();
  for (const { screenedBy } of gates) {
    const first = screenedBy[0];
    if (first !== undefined) screens.set(first, (screens.get(first) ?? 0) + 1);
  }
  for (const [screen, count] of screens) words.push(`${count} of ${gates.length} gates screened: ${screen}`);
  const filled = gates.filter(({ filledDbz }) => filledDbz !== null);
  if (filled.length > 0)
    words.push(`${filled.length} filled with ${range(filled.map(({ filledDbz }) => filledDbz))} dBZ`);
  const marks = new Set(gates.flatMap((gate) => gate.marks.filter((mark) => mark !== "filled")));
  if (marks.size > 0) words.push([...marks].join(", "));
  const wet = gates.filter(({ rateMmPerHour }) => (rateMmPerHour ?? 0) > 0);
  if (wet.length > 0) {
    words.push(`makes rain: ${range(wet.map(({ dbz }) => dbz))} dBZ`);
    const byZ = new Set(
      wet.flatMap(({ method, relation }) => (method === "z" && relation !== null ? [relation] : [])),
    );
    for (const relation of byZ) words.push(`by Z = ${relation.replace("/", " R^")}`);
    const others = new Set(wet.flatMap(({ method }) => (method === null || method === "z" ? [] : [method])));
    for (const method of others) {
      const kdp = range(
        wet.filter((gate) => gate.method === method).map(({ kdpDegPerKm }) => kdpDegPerKm),
        2,
      );
      const ofKdp = method === "kdp" || method === "hail-kdp" ? `, KDP ${kdp} deg/km` : "";
      words.push(`mostly by ${METHOD_WORDS[method]}${ofKdp}`);
    }
    if (dropNumberFactor !== null && dropNumberFactor !== 1)
      words.push(`times ${decimals(dropNumberFactor, 3)} for the number of drops`);
  }
  const silent = gates.filter(({ rateMmPerHour }) => rateMmPerHour === null).length;
  if (silent > 0) words.push(`${silent} of ${gates.length} gates say nothing`);
  const capped = gates.filter((gate) => gate.capped).length;
  if (capped > 0) words.push(`${capped} at the cap`);
  return words.join("; ");
}

/** "31.2", "31.2 to 34.0", "no" where there is none. */
function range(values: readonly (number | null)[], digits = 1, signed = false): string {
  const known = values.filter((value) => value !== null);
  if (known.length === 0) return "no";
  const text = (value: number) => `${signed && value > 0 ? "+" : ""}${decimals(value, digits)}`;
  const [low, high] = [text(Math.min(...known)), text(Math.max(...known))];
  return low === high ? low : `${low} to ${high}`;
}

function intervalTable({ intervals, gauge }: PointAccount): string {
  const hasAdjusted = intervals.some(({ adjustedMm }) => adjustedMm !== null);
  const right = (head: string) => ({ head, align: "right" as const });
  const columns = [
    { head: "  to" },
    right("sum of parts"),
    right("radar, again"),
    right("stored"),
    ...(hasAdjusted ? [right("adjusted"), right("stored")] : []),
    ...(gauge === null ? [] : [right("gauge")]),
  ];
  const mm = (value: number | null) => fixedDecimals(value, 4);
  return textTable(
    columns,
    intervals.map((one) => [
      `  ${instant(one.end)}`,
      mm(one.partsMm),
      mm(one.radarMm),
      mm(one.storedMm),
      ...(hasAdjusted ? [mm(one.adjustedMm), mm(one.storedAdjustedMm)] : []),
      ...(gauge === null ? [] : [fixedDecimals(one.gaugeMm, 2)]),
    ]),
  );
}

function gaugeLines(gauge: NonNullable<PointAccount["gauge"]>): string[] {
  const { network, gaugeId, name, verdict, cause, gaugeMm, radarMm, cellCount, readingMinutes } = gauge;
  return [
    `Gauge ${displayText(network)}/${displayText(gaugeId)}${name === null ? "" : ` (${displayText(name)})`}: ${fixedDecimals(gaugeMm, 2)} mm beside the radar's ${fixedDecimals(radarMm, 2)} mm over the time both saw`,
    `  verdict ${verdict}${cause === "" ? "" : `: ${displayText(cause)}`}; readings of ${readingMinutes === null ? "single tips" : `${decimals(readingMinutes, 1)} min`}`,
    ...(cellCount > 1
      ? [`  the pair is made with the mean of ${cellCount} cells; this account is of the gauge's own`]
      : []),
  ];
}

function endLines({
  radarMm,
  storedRadarMm,
  partsMm,
  adjustedMm,
  storedAdjustedMm,
  exact,
  what,
}: PointAccount["end"]): string[] {
  const full = (value: number | null) => (value === null ? "not observed" : `${value} mm`);
  return [
    `The end: ${what}`,
    `  parts  ${full(partsMm)}`,
    `  radar  ${full(radarMm)}; stored ${full(storedRadarMm)}`,
    ...(adjustedMm === null && storedAdjustedMm === null
      ? []
      : [`  adjusted  ${full(adjustedMm)}; stored ${full(storedAdjustedMm)}`]),
    exact
      ? "  The same to the last bit: the account ends on what is stored."
      : "  NOT THE SAME: this account does not end on what is stored.",
  ];
}

function adjustmentLines(adjustment: AdjustmentAccount, figureMm: number | null): string[] {
  const { applied, reason, title, factor, factorHere, gaugeCount, notes, gauges, gaugesNotListed } =
    adjustment;
  if (!applied) return [`Not adjusted: ${reason ?? ""}.`];
  const shown = gauges.slice(0, GAUGES_SHOWN);
  const right = (head: string) => ({ head, align: "right" as const });
  const hasWeight = shown.some(({ weight }) => weight !== null);
  const left = gauges.length + gaugesNotListed - shown.length;
  return [
    `Adjusted by ${title ?? ""}, from ${gaugeCount} gauges${factor === null ? "" : `: one factor, ${decimals(factor, 4)} (gauge/radar)`}; here ${decimals(factorHere ?? Number.NaN, 4)} times the radar`,
    ...notes.map((note) => `  in it: ${note}`),
    "  Gauges that move the figure most. per mm: how far it moves where the gauge reads 1 mm more.",
    textTable(
      [
        { head: "  gauge" },
        right("km"),
        right("gauge mm"),
        right("radar mm"),
        right("G/R"),
        ...(hasWeight ? [right("weight")] : []),
        right("per mm"),
        right("without it"),
      ],
      shown.map((gauge) => [
        `  ${gauge.network}/${gauge.gaugeId}`,
        fixedDecimals(gauge.distanceKm, 1),
        fixedDecimals(gauge.gaugeMm, 1),
        fixedDecimals(gauge.radarMm, 1),
        fixedDecimals(gauge.radarMm > 0 ? gauge.gaugeMm / gauge.radarMm : Number.NaN, 2),
        ...(hasWeight ? [fixedDecimals(gauge.weight, 3)] : []),
        fixedDecimals(gauge.mmPerMm, 3),
        withoutText(gauge.withoutMm, figureMm),
      ]),
    ),
    ...(left > 0 ? [`  and ${left} more gauges; --json holds the ${gauges.length} nearest`] : []),
  ];
}

function withoutText(withoutMm: number | null, figureMm: number | null): string {
  if (withoutMm === null) return "–";
  const change =
    figureMm === null
      ? ""
      : ` (${withoutMm >= figureMm ? "+" : ""}${fixedDecimals(withoutMm - figureMm, 2)})`;
  return `${fixedDecimals(withoutMm, 2)}${change}`;
}

function areaText(area: AreaAccount, explanation: Explanation): string {
  const { end, scans, steps } = area;
  const right = (head: string) => ({ head, align: "right" as const });
  const wettest = (count: number) =>
    new Set(
      scans
        .toSorted((a, b) => (b.meanRateMmPerHour ?? 0) - (a.meanRateMmPerHour ?? 0) || a.number - b.number)
        .slice(0, count)
        .concat(scans.slice(0, 1), scans.slice(-1))
        .map(({ number }) => number),
    );
  const shown = scans.length <= STEPS_SHOWN ? wettest(scans.length) : wettest(STEPS_SHOWN - 2);
  const percent = (share: number | null) => (share === null ? "–" : `${decimals(100 * share, 0)} %`);
  const db = (value: number | null) => fixedDecimals(value, 1).replace(/^-(0\.0)$/, "$1");
  const clock = clockOf(explanation);
  const shownSteps =
    steps.length <= STEPS_SHOWN
      ? steps
      : steps
          .toSorted((a, b) => (b.radarMm ?? 0) - (a.radarMm ?? 0))
          .slice(0, STEPS_SHOWN)
          .toSorted((a, b) => (a.end < b.end ? -1 : 1));
  const lines = [
    `${fixedDecimals(end.depthObservedMm, 2)} mm (${end.adjustedMm === null ? "radar, not adjusted" : "adjusted"}) over catchment ${displayText(area.id)}, ${displayText(area.name)}: how it came to be`,
    ...headLines(explanation, end.spanRadarMm),
    `${decimals(area.areaKm2, 1)} km², ${area.cellCount} cells by their share inside; observed ${percent(end.observedFraction)} of area and time`,
    ...CHAIN,
    "",
    `Scans (${scans.length}), UTC: means over the area; corrections in dB are means by rain`,
    textTable(
      [
        right("    #"),
        { head: "time" },
        { head: "source" },
        right("mm/h"),
        right("seen"),
        right("screened"),
        right("filled"),
        right("block"),
        right("gas"),
        right("atten"),
        right("profile"),
        right("at cap"),
      ],
      scans
        .filter(({ number }) => shown.has(number))
        .map((scan) => [
          String(scan.number),
          clock(scan.time),
          scan.kind === "gridded" ? `${scan.source} (gridded)` : scan.source,
          fixedDecimals(scan.meanRateMmPerHour, 3),
          percent(scan.observedShare),
          percent(scan.screenedShare),
          percent(scan.filledShare),
          db(scan.correctionsDb.blockage),
          db(scan.correctionsDb.gas),
          db(scan.correctionsDb.attenuation),
          db(scan.correctionsDb.profile),
          percent(scan.cappedShare),
        ]),
    ),
    ...(shown.size < scans.length
      ? [
          `  … ${scans.length - shown.size} of ${scans.length} scans are left out here: shown are the first, the last and the wettest; --csv and --json hold all`,
        ]
      : []),
    "",
    "Steps, mm, UTC",
    textTable(
      [
        { head: "  to" },
        right("radar"),
        right("stored"),
        right("adjusted"),
        right("observed"),
        right("radar so far"),
      ],
      shownSteps.map((step) => [
        `  ${clock(step.end)}`,
        fixedDecimals(step.radarMm, 3),
        step.storedRadarMm ?? "–",
        fixedDecimals(step.adjustedMm, 3),
        percent(step.observedFraction),
        fixedDecimals(step.runningMm, 3),
      ]),
    ),
    ...(shownSteps.length < steps.length
      ? [
          `  … ${steps.length - shownSteps.length} of ${steps.length} steps are left out here: shown are the wettest`,
        ]
      : []),
    "",
    "The end: the window's row of catchments.csv",
    `  radar ${fixedDecimals(end.radarMm, 3)} mm${end.adjustedMm === null ? "" : `, adjusted ${fixedDecimals(end.adjustedMm, 3)} mm`}; stored ${end.storedDepthObservedMm ?? "–"} mm`,
    end.exact
      ? "  The same to the last digit written: the account ends on what is stored."
      : "  NOT THE SAME: this account does not end on what is stored.",
    "",
    ...adjustmentLines(area.adjustment, end.adjustedMm),
  ];
  return lines.join("\n");
}

/** "2031-05-20 12:05 UTC" of an ISO instant. */
function instant(iso: string): string {
  return utcText(Date.parse(iso));
}

/** "12:05:18", with its date where the span holds more than one. */
function clockOf({ span }: Explanation): (iso: string) => string {
  const day = span.start.slice(0, 10);
  const isOneDay = [span.end, new Date(Date.parse(span.end) - 1).toISOString()].some((end) =>
    end.startsWith(day),
  );
  return (iso) => (isOneDay ? iso.slice(11, 19) : iso.slice(0, 19).replace("T", " "));
}

const WIDTH = 100;

/** Breaks a line at blanks; what follows is indented a little further. */
function wrapped(line: string): string[] {
  const indent = `${/^ */.exec(line)?.[0] ?? ""}  `;
  const lines: string[] = [];
  let rest = line;
  while (rest.length > WIDTH) {
    const cut = rest.lastIndexOf(" ", WIDTH);
    if (cut <= indent.length) break;
    lines.push(rest.slice(0, cut));
    rest = `${indent}${rest.slice(cut + 1)}`;
  }
  return [...lines, rest];
}
