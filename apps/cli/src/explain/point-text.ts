import { EFFECTS, type RateMethod } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { decimals, fixedDecimals, placeText } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { Explanation, PartAccount, PointAccount, ScanAccount } from "./schema.ts";
import { sureLines } from "./sure.ts";
import { adjustmentLines, CHAIN, clockOf, headLines, instant, range, right } from "./text-words.ts";

/** Scans shown in full; of more, the first, the last and those that add most. */
const SCANS_SHOWN = 12;
const MOST_ADDING = 8;

/** The account of one cell for people: scan by scan, interval by interval, to the stored figure. */
export function pointText(point: PointAccount, explanation: Explanation): string {
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
function dbzText({ gates, dropSizeFactor, dropNumberFactor }: ScanAccount): string {
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
    if (dropSizeFactor !== null && dropSizeFactor !== 1)
      words.push(`R(Z) times ${decimals(dropSizeFactor, 3)} for the size of drops`);
    if (dropNumberFactor !== null && dropNumberFactor !== 1)
      words.push(`times ${decimals(dropNumberFactor, 3)} for the number of drops`);
  }
  const silent = gates.filter(({ rateMmPerHour }) => rateMmPerHour === null).length;
  if (silent > 0) words.push(`${silent} of ${gates.length} gates say nothing`);
  const capped = gates.filter((gate) => gate.capped).length;
  if (capped > 0) words.push(`${capped} at the cap`);
  return words.join("; ");
}

function intervalTable({ intervals, gauge }: PointAccount): string {
  const hasAdjusted = intervals.some(({ adjustedMm }) => adjustedMm !== null);
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
  sure,
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
    ...sureLines(sure),
    exact
      ? "  The same to the last bit: the account ends on what is stored."
      : "  NOT THE SAME: this account does not end on what is stored.",
  ];
}
