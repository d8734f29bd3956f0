import { type DecimalMark, decimalOf } from "./decimal.ts";
import type { GaugeKind, GaugeLayout, GaugeUnit } from "./gauge-file-spec.ts";
import { idOfFileName, idOfLabel } from "./gauge-of-file.ts";
import { found, type Guess, guessed } from "./guess.ts";
import { GAUGE_WORDS } from "./sniff-stations.ts";
import type { TimesGuess } from "./sniff-times.ts";
import { type DateForm, StampScanner } from "./stamp.ts";
import { isMissingWord, isNumeric, type TableSample } from "./table-sample.ts";
import type { TextEncodingName } from "./text-encoding.ts";
import { usualStepMs } from "./usual-step.ts";

const MINUTE_MS = 60_000;
const VALUE_WORDS =
  /value|rain|precip|depth|amount|intensity|rate|tips|level|counter|cumul|total|accum|^rr|^mm|\bmm\b|inch/i;
/** What stands beside rain in the file of one gauge. */
const OTHER_WEATHER_WORDS = /temp|wind|humid|press|volt|batt|snow|°C|hpa/i;
/** A line above a header that gives the gauge's id; one with its name does not. */
const ID_LABEL =
  /^[\s#"';,/*-]*((?:station|gauge|site|sensor|id|code)(?:[ _-]?(?:id|no|nr|number|code))?)["\s]*[:=;,\t|]["\s]*[^\s:=;,\t|"]/i;
const QUALITY_WORDS = /^(q|qc|qf|qual|quality|flag|flags|status)([_ -]?(code|flag|control|id))?$/i;
const RATE_WORDS = /mm\s*(\/|per)\s*h|mm_per_h|mm\s?h-1|in\s*\/\s*h|inch(es)?\s*per\s*h|intensity|\brate/i;
/** A column with more rises than this, and hardly a fall, is a level. */
const MIN_RISES = 3;
const MAX_FALL_SHARE = 0.05;
const MAX_QUALITY_CODES = 20;
/** Share of rows with the stamp of the row before from which a table holds several gauges. */
const MOST_REPEATS = 0.3;

export interface ReadingsGuess {
  readonly layout: Guess<GaugeLayout>;
  readonly columns: Guess<{
    readonly gauge?: string;
    readonly date?: string;
    readonly time?: string;
    readonly value?: string;
    readonly quality?: string;
  }>;
  readonly kind: Guess<GaugeKind>;
  readonly unit: Guess<GaugeUnit>;
  readonly tipMm?: Guess<number>;
  readonly stepMinutes?: Guess<number>;
  /** Zone that the stamps themselves name: "UTC", or "UTC+01:00"; undefined where they name none, or several. */
  readonly zone: Guess<string | undefined>;
  /** Earliest and latest stamp of both ends of the file; as if UTC where `zone` is undefined. */
  readonly firstEpochMs: number;
  readonly lastEpochMs: number;
  readonly gaugeIds: readonly string[];
  /** Whether `gaugeIds` are all there are. */
  readonly allGaugesSeen: boolean;
  /** Cells that look like "no value", as they are written. */
  readonly missing: Guess<readonly string[]>;
  /** Codes met in the quality column. */
  readonly qualityCodes: readonly string[];
  readonly encoding: Guess<TextEncodingName>;
  /** Line of the header, where it is not the first with text in it. */
  readonly headerLine?: number;
  readonly decimal: Guess<DecimalMark>;
  /** How dates are written; "ask" where nothing tells day and month apart. */
  readonly dates: Guess<DateForm | "ask">;
  /** Whether stamps are dates without a time of day, so that somebody must say when days begin. */
  readonly dateOnly: boolean;
  /** Where a gauge's id is found; with "label", the text before it in a line above the header. */
  readonly idFrom: Guess<"column" | "file" | "label">;
  readonly label?: string;
  /** For "succeeding" totals; "end" where nothing says so. */
  readonly stamp?: Guess<"end" | "start">;
}

/** What is known of a table beside its cells. */
export interface TableSurroundings {
  readonly encoding: Guess<TextEncodingName>;
  readonly headerLine?: number;
  readonly times: TimesGuess;
  readonly linesAbove: readonly string[];
  readonly path: string;
}

interface Roles {
  readonly layout: Guess<GaugeLayout>;
  /** The one gauge of the file, where neither a column nor headers name it. */
  readonly whole?: { readonly id: string; readonly idFrom: Guess<"file" | "label">; readonly label?: string };
  readonly gaugeAt: number;
  readonly valueAts: readonly number[];
  readonly qualityAt: number;
}

/** Times and values of one gauge, in the order of the file. */
interface Strand {
  readonly timesMs: number[];
  readonly values: number[];
}

/** What the readings of a table with a column of stamps look like. */
export function guessReadings(sample: TableSample, around: TableSurroundings): ReadingsGuess {
  const { columns, rows, timeAt, dateAt } = sample;
  const roles = guessRoles(sample, around);
  const { times, zone } = readTimes(sample, around.times);
  const missing = missingMarks(sample, roles.valueAts);
  const strands = strandsOf(
    sample,
    roles,
    times,
    new Set(missing.value.map((cell) => decimalOf(cell, sample.decimal))),
  );
  const isLong = roles.layout.value === "long";
  const valueHeader = isLong && roles.valueAts.length > 0 ? columns[roles.valueAts[0]] : "";
  const headers = isLong ? valueHeader : columns.join(" ");
  const step = guessStep(strands);
  const kind = guessKind(strands, headers, step?.regular ?? false, roles.valueAts.length === 0);
  const tipMm = kind.value === "tips" ? guessTip(strands) : undefined;
  // Days and months that may be exchanged give steps, but no dates.
  const finite = around.times.dates.value === "ask" ? [] : times.filter((time) => !Number.isNaN(time));
  return {
    layout: roles.layout,
    columns: guessed(
      {
        ...(dateAt === undefined ? {} : { date: columns[dateAt] }),
        time: columns[timeAt],
        ...(isLong && roles.gaugeAt >= 0 ? { gauge: columns[roles.gaugeAt] } : {}),
        ...(valueHeader === "" ? {} : { value: valueHeader }),
        ...(roles.qualityAt < 0 ? {} : { quality: columns[roles.qualityAt] }),
      },
      "from the headers and what the columns hold",
    ),
    kind,
    unit: guessUnit(headers, kind.value),
    ...(tipMm === undefined ? {} : { tipMm }),
    ...(step === undefined || kind.value === "tips"
      ? {}
      : { stepMinutes: guessed(step.stepMs / MINUTE_MS, "the commonest distance between a gauge's stamps") }),
    zone,
    firstEpochMs: finite.reduce((least, time) => Math.min(least, time), Number.POSITIVE_INFINITY),
    lastEpochMs: finite.reduce((most, time) => Math.max(most, time), Number.NEGATIVE_INFINITY),
    gaugeIds:
      roles.whole !== undefined
        ? [roles.whole.id]
        : isLong
          ? [...strands.keys()]
          : roles.valueAts.map((at) => columns[at]),
    allGaugesSeen: !isLong || sample.whole || roles.whole !== undefined,
    missing,
    qualityCodes:
      roles.qualityAt < 0
        ? []
        : [...new Set(rows.map((row) => row[roles.qualityAt]))].sort().slice(0, MAX_QUALITY_CODES),
    encoding: around.encoding,
    ...(around.headerLine === undefined ? {} : { headerLine: around.headerLine }),
    decimal:
      sample.decimal === "comma"
        ? guessed("comma", "more cells are numbers with a decimal comma than with a point")
        : found("point", "cells are numbers with a decimal point, or whole"),
    dates: around.times.dates,
    dateOnly: around.times.dateOnly,
    idFrom: roles.whole?.idFrom ?? found("column", "a column or the headers name the gauges"),
    ...(roles.whole?.label === undefined ? {} : { label: roles.whole.label }),
  };
}

function guessRoles(sample: TableSample, around: TableSurroundings): Roles {
  const { columns, rows, timeAt, dateAt } = sample;
  const free = columns
    .map((_, at) => at)
    .filter((at) => at !== timeAt && at !== dateAt && columns[at] !== "");
  const qualityAt = free.find((at) => QUALITY_WORDS.test(columns[at])) ?? -1;
  const others = free.filter((at) => at !== qualityAt);
  const numeric = others.filter((at) => isNumeric(sample, at));
  const gaugeByWord = others.find((at) => GAUGE_WORDS.test(columns[at]));
  const textual = others.find((at) => !numeric.includes(at) && rows.some((row) => row[at] !== ""));
  const repeated = rows.some((row, index) => index > 0 && row[timeAt] === rows[index - 1][timeAt]);
  const long = (gaugeAt: number, reason: string): Roles => {
    const values = numeric.filter((at) => at !== gaugeAt);
    const byWord = values.find((at) => VALUE_WORDS.test(columns[at]));
    const valueAt = byWord ?? values[values.length - 1];
    return {
      layout: guessed("long", reason),
      gaugeAt,
      valueAts: valueAt === undefined ? [] : [valueAt],
      qualityAt,
    };
  };
  if (gaugeByWord !== undefined) {
    return long(gaugeByWord, `column "${columns[gaugeByWord]}" is headed like one of gauge ids`);
  }
  if (repeated && numeric.length === 2 && numeric.length === others.length) {
    return long(numeric[0], "stamps repeat from row to row");
  }
  const rain = numeric.filter((at) => VALUE_WORDS.test(columns[at]));
  const besides = numeric.filter((at) => !VALUE_WORDS.test(columns[at]));
  const repeats = rows.filter((row, index) => index > 0 && row[timeAt] === rows[index - 1][timeAt]).length;
  // A row sent twice does not make two gauges.
  const oneAtATime = repeats < MOST_REPEATS * rows.length;
  if (oneAtATime && rain.length === 1 && besides.every((at) => OTHER_WEATHER_WORDS.test(columns[at]))) {
    const whole = gaugeOfFile(around);
    if (whole !== undefined) {
      return {
        layout: guessed(
          "long",
          `"${columns[rain[0]]}" names a quantity, not a gauge: the file is of one gauge`,
        ),
        whole,
        gaugeAt: -1,
        valueAts: rain,
        qualityAt,
      };
    }
  }
  if (textual !== undefined && numeric.length <= 1) {
    return long(textual, `column "${columns[textual]}" holds text`);
  }
  return {
    layout: guessed(
      "wide",
      numeric.length === 1
        ? "one column of numbers, headed like its gauge"
        : "each column of numbers is a gauge",
    ),
    gaugeAt: -1,
    // Columns still without a number belong to gauges that have been silent.
    valueAts: others.filter((at) => numeric.includes(at) || rows.every((row) => isNoNumber(row[at]))),
    qualityAt,
  };
}

/** The id of the one gauge of a file: behind a label above the header, else the file's name. */
function gaugeOfFile({ linesAbove, path }: TableSurroundings): Roles["whole"] {
  for (const line of linesAbove) {
    const label = ID_LABEL.exec(line)?.[1];
    if (label === undefined) continue;
    return {
      id: idOfLabel(linesAbove, label, path),
      idFrom: guessed("label", `the line "${line.slice(0, 80)}" stands above the header`),
      label,
    };
  }
  return {
    id: idOfFileName(path, "{id}"),
    idFrom: guessed("file", "nothing in the file names the gauge"),
  };
}

function isNoNumber(cell: string): boolean {
  return cell === "" || isMissingWord(cell);
}

function readTimes(
  { rows, timeAt, dateAt }: TableSample,
  { dates }: TimesGuess,
): { times: number[]; zone: Guess<string | undefined> } {
  const stamps = new StampScanner({ dates: dates.value === "ask" ? "dmy" : dates.value, dayHour: 0 });
  const offsets = new Set<number>();
  const times = rows.map((row) => {
    if (!stamps.scan(dateAt === undefined ? row[timeAt] : `${row[dateAt]} ${row[timeAt]}`)) return Number.NaN;
    offsets.add(stamps.offsetMinutes);
    return stamps.clockMs - (Number.isNaN(stamps.offsetMinutes) ? 0 : stamps.offsetMinutes * MINUTE_MS);
  });
  const [only] = offsets;
  if (offsets.size > 1) {
    return {
      times,
      zone: guessed(undefined, "the stamps carry different offsets, and are taken at their word"),
    };
  }
  if (Number.isNaN(only)) return { times, zone: guessed(undefined, "the stamps name no zone: ask") };
  if (only === 0) return { times, zone: found("UTC", "the stamps end in Z or an offset of 0") };
  const clock = `${String(Math.floor(Math.abs(only) / 60)).padStart(2, "0")}:${String(Math.abs(only) % 60).padStart(2, "0")}`;
  return {
    times,
    zone: found(
      `UTC${only < 0 ? "-" : "+"}${clock}`,
      "the stamps carry this offset; in another season it may differ",
    ),
  };
}

function missingMarks(sample: TableSample, valueAts: readonly number[]): Guess<readonly string[]> {
  const marks = new Set<string>();
  for (const row of sample.rows) {
    for (const at of valueAts) {
      const cell = row[at];
      // Rain is never negative, and nobody writes -99 by accident.
      if (isNoNumber(cell) || decimalOf(cell, sample.decimal) <= -99) marks.add(cell);
    }
  }
  return guessed([...marks].sort(), "cells met that hold no depth");
}

function strandsOf(
  sample: TableSample,
  roles: Roles,
  times: readonly number[],
  missing: ReadonlySet<number>,
): Map<string, Strand> {
  const strands = new Map<string, Strand>();
  const add = (id: string, timeMs: number, value: number) => {
    let strand = strands.get(id);
    if (strand === undefined) {
      strand = { timesMs: [], values: [] };
      strands.set(id, strand);
    }
    strand.timesMs.push(timeMs);
    strand.values.push(missing.has(value) ? Number.NaN : value);
  };
  sample.rows.forEach((row, index) => {
    if (Number.isNaN(times[index])) return;
    if (roles.layout.value === "long") {
      const [valueAt] = roles.valueAts;
      const id = roles.whole?.id ?? row[roles.gaugeAt];
      if (id !== "")
        add(id, times[index], valueAt === undefined ? Number.NaN : decimalOf(row[valueAt], sample.decimal));
    } else {
      for (const at of roles.valueAts)
        add(sample.columns[at], times[index], decimalOf(row[at], sample.decimal));
    }
  });
  return strands;
}

/** The commonest step, and whether most steps are of that length. */
function guessStep(strands: ReadonlyMap<string, Strand>): { stepMs: number; regular: boolean } | undefined {
  const steps: number[] = [];
  for (const { timesMs } of strands.values()) {
    const sorted = [...timesMs].sort((a, b) => a - b);
    for (let index = 1; index < sorted.length; index++) {
      if (sorted[index] > sorted[index - 1]) steps.push(sorted[index] - sorted[index - 1]);
    }
  }
  // The steps laid end to end: the commonest distance between these is the commonest step.
  let at = 0;
  const laidOut = Float64Array.from([0, ...steps], (step) => {
    at += step;
    return at;
  });
  const stepMs = usualStepMs(laidOut);
  if (stepMs === undefined) return undefined;
  return { stepMs, regular: steps.filter((step) => step === stepMs).length > steps.length / 2 };
}

function guessKind(
  strands: ReadonlyMap<string, Strand>,
  headers: string,
  regular: boolean,
  noValues: boolean,
): Guess<GaugeKind> {
  if (noValues) return guessed("tips", "there is no column of values: a row is a tip");
  if (RATE_WORDS.test(headers)) return guessed("intensity", "the header names a rate");
  let rises = 0;
  let falls = 0;
  let strandsAboveZero = 0;
  const different = new Set<number>();
  for (const { values } of strands.values()) {
    const numbers = values.filter((value) => !Number.isNaN(value));
    for (let index = 0; index < numbers.length; index++) {
      different.add(numbers[index]);
      if (index === 0) continue;
      if (numbers[index] > numbers[index - 1]) rises++;
      if (numbers[index] < numbers[index - 1]) falls++;
    }
    if (numbers.some((value) => value > 0)) strandsAboveZero += 1;
  }
  if (rises >= MIN_RISES && falls <= MAX_FALL_SHARE * rises) {
    return guessed("counter", `values rise ${rises} times and fall ${falls} times`);
  }
  if (!regular && strandsAboveZero > 0 && different.size <= 2 && [...different].some((value) => value > 0)) {
    return guessed("tips", "stamps keep no step and every value is the same");
  }
  return guessed(
    "increments",
    strandsAboveZero === 0
      ? "no rain in the part looked at; nothing speaks against it"
      : "values rise and fall",
  );
}

function guessUnit(headers: string, kind: GaugeKind): Guess<GaugeUnit> {
  const inches = /\binch(es)?\b|[[(_ ]in[\])/_ ]|[[(_ ]in$/i.test(headers);
  const millimetres = /mm/i.test(headers);
  if (kind === "intensity") {
    const unit = inches && !millimetres ? "in/h" : "mm/h";
    return inches || millimetres
      ? found(unit, "named in the header")
      : guessed(unit, "the header names no unit");
  }
  if (inches && !millimetres) return found("in", "named in the header");
  if (millimetres) return found("mm", "named in the header");
  if (/\btips\b|\bcount/i.test(headers)) return found("tips", "named in the header");
  return guessed("mm", "the header names no unit");
}

function guessTip(strands: ReadonlyMap<string, Strand>): Guess<number> | undefined {
  for (const { values } of strands.values()) {
    const tip = values.find((value) => value > 0);
    if (tip !== undefined) return guessed(tip, "the value of every tip");
  }
  return undefined;
}
