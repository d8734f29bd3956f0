import { displayText } from "@rainreckon/formats";
import { counted, depthText, fixedDecimals, localText, utcText } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { CheckDocument, CheckedGauge, CheckedRadar } from "./schema.ts";
import { radarCauseWords } from "./trust.ts";

/** What fits on a screen of 80 columns and 24 lines with the line of the prompt. */
const WIDTH = 80;
const SCREEN_LINES = 23;
const NAME = 14;
const BAR = 6;
const VERDICT = 10;
const CAUSE = WIDTH - NAME - 2 * (6 + 1 + BAR) - VERDICT - 5;

const SHORT = {
  "leave out": "LEAVE OUT",
  "use with care": "care",
  "too little rain to judge": "too little",
  use: "use",
} as const;

/** The first screen of a check: worst first, and no more than a screen holds unless all is asked for. */
export function checkText(check: CheckDocument, all: boolean, terminal: Terminal): string {
  const head = [
    terminal.strong(cut(displayText(check.title), WIDTH)),
    `  ${windowWords(check)}`,
    ...wrapped(check.trust),
    "",
    ...check.radars.flatMap(radarLines),
  ];
  const { counts } = check;
  const tail = [
    "",
    `${counted(check.gauges.length, "gauge")}: ${counts.leaveOut} to leave out, ${counts.useWithCare} with care, ${counts.use} in use, ${counts.tooLittleRain} with too little rain`,
    "Not for warning decisions alone; local rules and licensed practice come first.",
  ];
  const table = [
    `${"gauge".padEnd(NAME)}  ${"gauge mm".padEnd(6 + 1 + BAR)} ${"radar mm".padEnd(6 + 1 + BAR)} ${"verdict".padEnd(VERDICT)} cause`,
  ];
  const room = SCREEN_LINES - head.length - tail.length - table.length;
  const shown =
    all || check.gauges.length <= room ? check.gauges : check.gauges.slice(0, Math.max(1, room - 1));
  const mostMm = Math.max(...shown.flatMap(({ gaugeMm, radarMm }) => [gaugeMm ?? 0, radarMm ?? 0]), 1);
  table.push(...shown.map((gauge) => gaugeLine(gauge, barLimit(shown, mostMm))));
  const rest = check.gauges.length - shown.length;
  if (rest > 0) table.push(`and ${counted(rest, "gauge")} less in doubt: --all shows them, --json why`);
  if (check.gauges.length === 0) table.splice(0, table.length, "no gauge stands beside the radar");
  return [...head, ...table, ...tail].join("\n");
}

/** A single wild reading must not make all other bars vanish: bars end at twice what nine in ten depths reach. */
function barLimit(gauges: readonly CheckedGauge[], mostMm: number): number {
  const depths = gauges.flatMap(({ gaugeMm, radarMm }) => [gaugeMm ?? 0, radarMm ?? 0]).sort((a, b) => a - b);
  const high = depths[Math.floor(0.9 * (depths.length - 1))] ?? 0;
  return high > 0 ? Math.min(mostMm, 2 * high) : mostMm;
}

function gaugeLine(gauge: CheckedGauge, limitMm: number): string {
  const side = (mm: number | null) => `${depthText(mm).padStart(6)} ${bar(mm, limitMm)}`;
  const mark = gauge.override === null ? "" : "by override: ";
  return [
    `${cut(displayText(`${gauge.gaugeId} ${gauge.network}`), NAME).padEnd(NAME)} `,
    side(gauge.gaugeMm),
    side(gauge.radarMm),
    SHORT[gauge.verdict].padEnd(VERDICT),
    fitted(`${mark}${gauge.cause?.words ?? ""}`, CAUSE),
  ]
    .join(" ")
    .trimEnd();
}

const EIGHTHS = ["", "▏", "▎", "▍", "▌", "▋", "▊", "▉"];

/** A bar of eighths of a column; one that goes on beyond its room ends in an arrow. */
function bar(mm: number | null, limitMm: number): string {
  if (mm === null) return "".padEnd(BAR);
  if (mm > limitMm) return `${"█".repeat(BAR - 1)}▶`;
  const eighths = Math.round((mm / limitMm) * BAR * 8);
  return `${"█".repeat(Math.floor(eighths / 8))}${EIGHTHS[eighths % 8]}`.padEnd(BAR);
}

function radarLines(radar: CheckedRadar): string[] {
  const { ratio, low, high, gauges } = radar.whole;
  const percent = (value: number | null) => (value === null ? "–" : fixedDecimals(value, 2));
  const numbers =
    ratio === null
      ? "no ratio to gauges"
      : `radar/gauge ${percent(ratio)} (${percent(low)} to ${percent(high)}) at ${counted(gauges, "gauge")}`;
  const words = radarCauseWords(radar.cause);
  const cause = words === "" ? "" : `; ${words}`;
  return [
    cut(
      `radar ${displayText(radar.radarId)}: ${SHORT[radar.verdict]}; ${numbers}${displayText(cause)}`,
      WIDTH,
    ),
  ];
}

function windowWords({ window: { start, end, zone } }: CheckDocument): string {
  const [from, to] = [Date.parse(start), Date.parse(end)];
  const local = zone === "UTC" ? "" : ` (to ${localText(to, zone).slice(11)})`;
  return `${utcText(from)} to ${utcText(to)}${local}`;
}

/** Words with their details where they fit, else without, else cut. */
function fitted(words: string, width: number): string {
  const bare = words.replace(/:[^:]*$/, "");
  return words.length <= width || bare === "by override" ? cut(words, width) : cut(bare, width);
}

function cut(text: string, width: number): string {
  return text.length <= width ? text : `${text.slice(0, width - 1)}…`;
}

/** A sentence over as many lines as it takes. */
function wrapped(sentence: string): string[] {
  const lines: string[] = [""];
  for (const word of displayText(sentence, 600).split(" ")) {
    const last = lines[lines.length - 1] as string;
    if (last !== "" && last.length + 1 + word.length > WIDTH) lines.push(word);
    else lines[lines.length - 1] = last === "" ? word : `${last} ${word}`;
  }
  return lines;
}
