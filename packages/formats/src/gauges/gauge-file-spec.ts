import { InputError, MM_PER_INCH } from "@rainreckon/core";
import { Duration } from "luxon";
import type { DecimalMark } from "./decimal.ts";
import type { DateForm } from "./stamp.ts";
import type { TextEncodingName } from "./text-encoding.ts";
import type { DstRule } from "./zone-clock.ts";

export type GaugeLayout = "long" | "wide" | "waterml2";
export type GaugeKind = "increments" | "counter" | "intensity" | "tips";
export type GaugeUnit = "mm" | "in" | "mm/h" | "in/h" | "tips";

/** How the files of one gauge network are to be read. */
export interface GaugeFileSpec {
  readonly network: string;
  /** long: one row per gauge and time; wide: one row per time, one column per gauge; waterml2: WaterML 2.0. */
  readonly layout: GaugeLayout;
  /** Not for WaterML, which names its parts itself. */
  readonly columns: {
    /** Long layout only, and needed there unless `idFrom` says otherwise. */
    readonly gauge?: string | undefined;
    /** Column of dates, where the time column holds the time of day alone. */
    readonly date?: string | undefined;
    /** Not for WaterML; needed elsewhere. */
    readonly time?: string | undefined;
    /** Long layout only; may be left out for tips, where a row is then one tip. */
    readonly value?: string | undefined;
    /** In the wide layout the code holds for the whole row. */
    readonly quality?: string | undefined;
  };
  /** increments: depth per step; counter: a level that rises; intensity: rate over the step; tips: a row per tip. */
  readonly kind: GaugeKind;
  readonly unit: GaugeUnit;
  /** Depth of one tip. */
  readonly tipMm?: number | undefined;
  /** Time that a reading covers; found from each gauge's own stamps where left out. */
  readonly stepMinutes?: number | undefined;
  /** Whether a stamp marks the end or the start of what it covers. */
  readonly stamp: "end" | "start";
  readonly zone: string;
  readonly dst: DstRule;
  /** What no row means: "dry", "missing", or "heartbeat PT60M": dry for so long after any row. */
  readonly silence: string;
  /** Cells that stand for a missing value; numbers among them match by value. */
  readonly missing: readonly string[];
  /** The network's own codes; one that is in no list is reported and treated as doubt. */
  readonly quality?:
    | {
        readonly use: readonly string[];
        readonly doubt: readonly string[];
        readonly drop: readonly string[];
        /** Codes of readings that cover all the time since the gauge's last value, to be used. */
        readonly accumulated?: readonly string[] | undefined;
      }
    | undefined;
  /** Fall of a counter, in mm, that is taken for jitter and not for a reset; 0.3 where left out. */
  readonly counterJitterMm?: number | undefined;
  /** Level, in the file's unit, at which the counter starts again from 0; never where left out. */
  readonly counterRollsOverAt?: number | undefined;
  /** Found from the bytes where left out. */
  readonly encoding?: TextEncodingName | undefined;
  /** Line with the names of the columns, from 1; the first one with text in it where left out. */
  readonly headerLine?: number | undefined;
  /** point where left out. */
  readonly decimal?: DecimalMark | undefined;
  /** Order of the dates, ymd where left out; "ask" where nobody has settled it yet: nothing is read then. */
  readonly dates?: DateForm | "ask" | undefined;
  /** Hour at which days begin; needed where stamps are dates without a time of day. "ask" as in `dates`. */
  readonly dayHour?: number | "ask" | undefined;
  /**
   * Long layout, one file per gauge: the id is taken from the file's name (`fileName`) or from a line above
   * the header (`label`). "column" where left out.
   */
  readonly idFrom?: "column" | "file" | "label" | undefined;
  /** The file's name without its ending as a pattern: {id} is the id, * anything; "{id}" where left out. */
  readonly fileName?: string | undefined;
  /** Text before the id in a line above the header, as in "Station: 0042". */
  readonly label?: string | undefined;
  /** What "<0.2" counts as; zero where left out. */
  readonly below?: "zero" | "missing" | undefined;
  /** Cells that mean rain too little to measure: 0 mm, and counted; "T" and "Tr" where left out. */
  readonly trace?: readonly string[] | undefined;
}

export const DEFAULT_TRACE: readonly string[] = ["T", "Tr"];

export type Silence =
  | { readonly rule: "dry" }
  | { readonly rule: "missing" }
  | { readonly rule: "heartbeat"; readonly heartbeatMs: number };

const UNITS_OF_KIND: Record<GaugeKind, readonly GaugeUnit[]> = {
  increments: ["mm", "in", "tips"],
  counter: ["mm", "in", "tips"],
  intensity: ["mm/h", "in/h"],
  tips: ["mm", "in", "tips"],
};

/**
 * Checks that the parts of a spec fit each other.
 *
 * @throws InputError (usage) that names the first part that does not
 */
export function checkGaugeFileSpec(spec: GaugeFileSpec): void {
  const refuse = (what: string, fix: string) => {
    throw new InputError(what, `gauge files of network ${spec.network}`, fix, { kind: "usage" });
  };
  if (!UNITS_OF_KIND[spec.kind].includes(spec.unit)) {
    refuse(`${spec.kind} cannot be in ${spec.unit}`, `unit: one of ${UNITS_OF_KIND[spec.kind].join(", ")}`);
  }
  if (spec.dates === "ask") {
    refuse("the order of day and month is not settled", "dates: dmy, or dates: mdy; ask the network");
  }
  if (spec.dayHour === "ask") {
    refuse(
      "the hour at which the network's days begin is not settled",
      "dayHour: 0 to 23, and stamp: start or end; ask the network",
    );
  }
  if (spec.layout !== "waterml2" && spec.columns.time === undefined) {
    refuse("a table needs a time column", "columns.time: the header above the stamps");
  }
  if (spec.layout === "wide" && spec.kind === "tips") {
    refuse("tips cannot stand in a wide table", "write one row per tip: gauge, time");
  }
  const idFrom = spec.idFrom ?? "column";
  if (spec.layout === "long" && idFrom === "column" && spec.columns.gauge === undefined) {
    refuse(
      "the long layout needs a gauge column",
      "columns.gauge: the header above the gauges' ids; or idFrom: file, where each file is a gauge",
    );
  }
  if (spec.layout !== "long" && idFrom !== "column") {
    refuse(`idFrom: ${idFrom} goes with the long layout only`, "layout: long, or leave idFrom out");
  }
  if (idFrom === "label" && (spec.label ?? "") === "") {
    refuse("the label before the id is not known", 'label: the text before the id, "Station" say');
  }
  if (idFrom === "file" && (spec.fileName ?? "{id}").split("{id}").length !== 2) {
    refuse(
      `"${spec.fileName}" does not say where the id is`,
      'fileName: a pattern with one {id}, "rain_{id}_*" say',
    );
  }
  if (spec.layout === "long" && spec.columns.value === undefined && spec.kind !== "tips") {
    refuse("the long layout needs a value column", "columns.value: the header above the readings");
  }
  const countsTips = spec.unit === "tips" || (spec.kind === "tips" && spec.columns.value === undefined);
  if (countsTips && !((spec.tipMm ?? 0) > 0)) {
    refuse("the depth of one tip is not known", "tipMm: the depth of one tip in mm, 0.2 say");
  }
  silenceOf(spec);
}

/** The silence rule as parts. @throws InputError (usage) where it is none */
export function silenceOf(spec: Pick<GaugeFileSpec, "silence" | "network">): Silence {
  if (spec.silence === "dry" || spec.silence === "missing") return { rule: spec.silence };
  const duration = /^heartbeat (P\S+)$/.exec(spec.silence)?.[1];
  const heartbeatMs = duration === undefined ? Number.NaN : Duration.fromISO(duration).toMillis();
  if (heartbeatMs > 0) return { rule: "heartbeat", heartbeatMs };
  throw new InputError(
    `"${spec.silence}" is no rule for silence`,
    `gauge files of network ${spec.network}`,
    'silence: "dry", "missing" or "heartbeat PT60M"',
    { kind: "usage" },
  );
}

/** What a number in the file is multiplied by to be mm (of intensities: mm/h). */
export function mmPerUnit(spec: Pick<GaugeFileSpec, "unit" | "tipMm">): number {
  if (spec.unit === "tips") return spec.tipMm ?? Number.NaN;
  return spec.unit === "in" || spec.unit === "in/h" ? MM_PER_INCH : 1;
}
