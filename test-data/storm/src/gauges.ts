import type { LonLat, Plane } from "./earth.ts";
import type { RandomStream } from "./random.ts";
import type { Weather } from "./weather.ts";

/** What is wrong with a gauge, by our own names; each is told in truth.json. */
export type GaugeFault =
  | "dead"
  | "dies-mid-storm"
  | "inches-as-mm"
  | "clock-60-min-late"
  | "spike"
  | "missing-hours"
  | "duplicated-line"
  | "outside-grid"
  | "no-station-entry"
  | "partly-blocked"
  | "misplaced";

/** A gauge of the invented networks: where it stands in a district 160 km wide, and its fault. */
export interface GaugePlan {
  readonly network: "moor" | "saltwater" | "tideway";
  readonly id: string;
  readonly name: string;
  readonly xKm: number;
  readonly yKm: number;
  readonly fault?: GaugeFault;
}

function gauge(
  network: GaugePlan["network"],
  id: string,
  name: string,
  xKm: number,
  yKm: number,
  fault?: GaugeFault,
): GaugePlan {
  return fault === undefined ? { network, id, name, xKm, yKm } : { network, id, name, xKm, yKm, fault };
}

export const GAUGES: readonly GaugePlan[] = [
  gauge("moor", "M01", "Sallow Head", -36, 30),
  gauge("moor", "M02", "Peat Cross", -25, 14, "duplicated-line"),
  gauge("moor", "M03", "Carr End", -4, 28, "spike"),
  gauge("moor", "M04", "Withy Bank", 8, 11),
  gauge("moor", "M05", "Stone Fold", -17, -6, "dead"),
  gauge("moor", "007", "Old Pump", -31, -12),
  gauge("moor", "NO", "North Outfall", -12, -22),
  gauge("moor", "M08", "Glass Weir", 9, -18, "dies-mid-storm"),
  gauge("moor", "M09", "Lower Glass", 21, -31),
  gauge("moor", "M10", "Reach Top", 33, 22),
  gauge("moor", "M11", "Reach Lock", 38, 3, "clock-60-min-late"),
  gauge("moor", "M12", "Mere Side", -33, -27),
  gauge("moor", "M13", "Far Skerry", -30, 158, "outside-grid"),
  gauge("moor", "M14", "Heath Mast", 24, 27),
  gauge("saltwater", "SW-01", "Sluice One", -20, 25),
  gauge("saltwater", "SW-02", "Sluice Two", -39, 12),
  gauge("saltwater", "SW-03", "Carr Mill", 3, 3),
  gauge("saltwater", "SW-04", "Brine House", 16, -8, "inches-as-mm"),
  gauge("saltwater", "SW-05", "Glass Foot", 2, -31),
  gauge("saltwater", "SW-06", "Mere Gate", -23, -30),
  gauge("saltwater", "SW-07", "Long Bridge", 30, 12, "missing-hours"),
  gauge("saltwater", "SW-08", "East Sluice", 42, -6),
  gauge("saltwater", "SW-09", "Nether Quay", -10, -10),
  gauge("saltwater", "SW-10", "Lost Post", 28, -14, "no-station-entry"),
  gauge("saltwater", "SW-11", "Carr Top", 14, 33),
  gauge("tideway", "T1", "Tide Post One", -28, 2),
  gauge("tideway", "T2", "Tide Post Two", 20, -20),
  gauge("tideway", "T3", "Tide Post Three", 34, 30),
];

/** Depth of one tip, mm. */
export const TIP_MM = 0.2;

/** What a gauge truly received and what it wrote down. Minutes count from the storm's start. */
export interface GaugeRecord {
  readonly plan: GaugePlan;
  readonly place: LonLat;
  readonly xKm: number;
  readonly yKm: number;
  /** Shape [minutes]: depth of each minute, mm. */
  readonly trueMm: Float64Array;
  /** Seconds after the start at which the bucket tipped. */
  readonly tipSeconds: readonly number[];
}

/** Steps per minute at which the rain over a gauge is followed. */
const STEPS = 2;

/**
 * Lets the storm pass over every gauge.
 *
 * A tipping bucket loses water while it turns, the more the harder it rains: here 0.08 % for each mm/h, at
 * most 12 % (the size, not the law, after La Barbera, Lanza and Stagi, 2002, Water Sci. Technol. 45(2), 1-9;
 * from memory). Each gauge also has a lasting error of its own, normal with 2 %.
 */
export function recordGauges(
  weather: Weather,
  random: RandomStream,
  plane: Plane,
  sizeKm: number,
  minutes: number,
  plans: readonly GaugePlan[] = GAUGES,
): GaugeRecord[] {
  const scale = sizeKm / 160;
  return plans.map((plan) => {
    const far = plan.fault === "outside-grid";
    const xKm = plan.xKm * (far ? 1 : scale);
    const yKm = plan.yKm * (far ? 1 : scale);
    const trueMm = new Float64Array(minutes);
    const tipSeconds: number[] = [];
    const catchFactor = 1 + 0.02 * random.normal();
    let bucketMm = TIP_MM * random.uniform();
    for (let step = 0; step < minutes * STEPS; step++) {
      const rate = weather.rateAt(xKm, yKm, (step + 0.5) / STEPS);
      const fellMm = rate / 60 / STEPS;
      trueMm[Math.floor(step / STEPS)]! += fellMm;
      const caughtMm = fellMm * catchFactor * (1 - Math.min(0.12, 0.0008 * rate));
      let leftMm = caughtMm;
      while (bucketMm + leftMm >= TIP_MM) {
        leftMm -= TIP_MM - bucketMm;
        bucketMm = 0;
        tipSeconds.push(Math.ceil(((step + 1 - leftMm / caughtMm) / STEPS) * 60));
      }
      bucketMm += leftMm;
    }
    return { plan, place: plane.toPlace(xKm, yKm), xKm, yKm, trueMm, tipSeconds };
  });
}

/** Written depths per step of `stepMinutes`, before any fault: whole tips, interval-ending. Shape [steps]. */
export function tipsPerStep(record: GaugeRecord, stepMinutes: number): Float64Array {
  const steps = new Float64Array(record.trueMm.length / stepMinutes);
  for (const second of record.tipSeconds) {
    // A tip exactly on a border belongs to the step that ends there.
    steps[Math.max(0, Math.ceil(second / 60 / stepMinutes) - 1)]! += TIP_MM;
  }
  return steps;
}

/** Everything the three networks write, and what was done to it on purpose. */
export interface GaugeFiles {
  readonly moor: string;
  readonly moorStations: string;
  readonly saltwater: string;
  readonly saltwaterStations: string;
  readonly tideway: string;
  readonly tidewayStations: string;
  readonly faults: readonly PlantedFault[];
}

export interface PlantedFault {
  readonly network: string;
  readonly gauge: string;
  readonly fault: GaugeFault;
  readonly detail: string;
}

/** The clock of the saltwater network: the zone's standard time all year, UTC+1. */
const SALTWATER_CLOCK_MS = 3600_000;

/** Writes the gauge files' text, faults and all. */
export function writeGauges(
  records: readonly GaugeRecord[],
  plane: Plane,
  startEpochMs: number,
  heightM: (xKm: number, yKm: number) => number,
): GaugeFiles {
  const faults: PlantedFault[] = [];
  const of = (network: GaugePlan["network"]): GaugeRecord[] =>
    records.filter((record) => record.plan.network === network);
  const stations = (network: GaugePlan["network"]): string => stationsCsv(of(network), heightM);
  for (const record of records) {
    if (record.plan.fault === undefined) continue;
    const { network, id, fault } = record.plan;
    const detail = faultDetail(fault, record, plane, startEpochMs);
    faults.push({ network, gauge: id, fault, detail });
  }
  return {
    moor: moorCsv(of("moor"), startEpochMs),
    moorStations: stations("moor"),
    saltwater: saltwaterCsv(of("saltwater"), startEpochMs),
    saltwaterStations: stations("saltwater"),
    tideway: tidewayCsv(of("tideway"), startEpochMs),
    tidewayStations: stations("tideway"),
    faults,
  };
}

/** The minute after which a gauge that dies writes only 0: half of the storm, on a border of 10 minutes. */
function deathMinute(minutes: number): number {
  return Math.floor(minutes / 20) * 10;
}

/** The span (from, to] without values: a third of the storm around its middle, on borders of 10 minutes. */
function missingMinutes(minutes: number): { from: number; to: number } {
  const from = Math.floor(minutes / 30) * 10;
  return { from, to: from + Math.max(10, Math.floor(minutes / 30) * 10) };
}

/** The step, counted from 0, whose value is replaced by the spike. */
function spikeStep(steps: number): number {
  return Math.floor(steps * 0.6);
}

const SPIKE_MM = 87;

/** How far east of its place the stations file puts a misplaced gauge: some 14 km. */
const MISPLACED_LON_DEG = 0.2;

function faultDetail(fault: GaugeFault, record: GaugeRecord, plane: Plane, startEpochMs: number): string {
  const minutes = record.trueMm.length;
  const at = (minute: number): string => isoMinute(startEpochMs + minute * 60_000);
  switch (fault) {
    case "dead":
      return "every value is 0";
    case "dies-mid-storm":
      return `every value after ${at(deathMinute(minutes))} is 0`;
    case "inches-as-mm":
      return "values are inches under a header that says mm: too small by 25.4";
    case "clock-60-min-late":
      return "every stamp is 60 minutes later than the rain it stands for";
    case "spike":
      return `the value ending ${at((spikeStep(minutes / 5) + 1) * 5)} is ${SPIKE_MM} mm`;
    case "missing-hours": {
      const { from, to } = missingMinutes(minutes);
      return `values of (${at(from)}, ${at(to)}] are empty`;
    }
    case "duplicated-line":
      return `the line ending ${at(10)} is written twice`;
    case "outside-grid": {
      const place = plane.toPlace(record.xKm, record.yKm);
      return `stands at ${place.latDeg.toFixed(2)}N ${place.lonDeg.toFixed(2)}E, beyond the grid and every radar`;
    }
    case "no-station-entry":
      return "has readings but no line in the stations file";
    case "partly-blocked":
      return "one tip in three is written: the funnel lets a third of the water through";
    case "misplaced":
      return `the stations file puts it ${MISPLACED_LON_DEG} degrees too far east`;
  }
}

function isoMinute(epochMs: number): string {
  return `${new Date(epochMs).toISOString().slice(0, 19)}Z`;
}

function everyThirdTip(record: GaugeRecord): GaugeRecord {
  return { ...record, tipSeconds: record.tipSeconds.filter((_, tip) => tip % 3 === 2) };
}

function moorCsv(records: readonly GaugeRecord[], startEpochMs: number): string {
  const step = 5;
  const lines = ["gauge,time,value_mm,quality"];
  for (const record of records) {
    const { fault, id } = record.plan;
    const values = tipsPerStep(fault === "partly-blocked" ? everyThirdTip(record) : record, step);
    const late = fault === "clock-60-min-late" ? 60 : 0;
    values.forEach((value, i) => {
      const end = (i + 1) * step;
      let written = value;
      if (fault === "dead" || (fault === "dies-mid-storm" && end > deathMinute(record.trueMm.length)))
        written = 0;
      if (fault === "spike" && i === spikeStep(values.length)) written = SPIKE_MM;
      // The network doubts one healthy gauge for a while: its column must be heeded, not believed to find faults.
      const quality = id === "M09" && i >= values.length / 2 && i < values.length / 2 + 3 ? "suspect" : "ok";
      const line = `${id},${isoMinute(startEpochMs + (end + late) * 60_000)},${written.toFixed(1)},${quality}`;
      lines.push(line);
      if (fault === "duplicated-line" && end === 10) lines.push(line);
    });
  }
  return `${lines.join("\n")}\n`;
}

function saltwaterCsv(records: readonly GaugeRecord[], startEpochMs: number): string {
  const step = 10;
  const minutes = records[0]!.trueMm.length;
  const columns = records.map((record) => tipsPerStep(record, step));
  const gap = missingMinutes(minutes);
  const lines = [["time", ...records.map(({ plan }) => plan.id)].join(",")];
  for (let i = 0; i < minutes / step; i++) {
    const end = (i + 1) * step;
    const local = new Date(startEpochMs + end * 60_000 + SALTWATER_CLOCK_MS).toISOString();
    const values = records.map(({ plan }, column) => {
      const value = columns[column]![i]!;
      if (plan.fault === "missing-hours" && end > gap.from && end <= gap.to) return "";
      return plan.fault === "inches-as-mm" ? (value / 25.4).toFixed(4) : value.toFixed(1);
    });
    lines.push([`${local.slice(0, 10)} ${local.slice(11, 16)}`, ...values].join(","));
  }
  return `${lines.join("\n")}\n`;
}

function tidewayCsv(records: readonly GaugeRecord[], startEpochMs: number): string {
  const tips = records.flatMap(({ plan, tipSeconds }) =>
    tipSeconds.map((second) => ({ id: plan.id, second })),
  );
  tips.sort((a, b) => a.second - b.second || (a.id < b.id ? -1 : 1));
  const lines = tips.map(
    ({ id, second }) => `${id},${isoMinute(startEpochMs + second * 1000)},${TIP_MM.toFixed(1)}`,
  );
  return `${["gauge,tip_time_utc,tip_mm", ...lines].join("\n")}\n`;
}

function stationsCsv(records: readonly GaugeRecord[], heightM: (xKm: number, yKm: number) => number): string {
  const lines = records
    .filter(({ plan }) => plan.fault !== "no-station-entry")
    .map(({ plan, place, xKm, yKm }) =>
      [
        plan.id,
        plan.name,
        (place.lonDeg + (plan.fault === "misplaced" ? MISPLACED_LON_DEG : 0)).toFixed(5),
        place.latDeg.toFixed(5),
        heightM(xKm, yKm).toFixed(0),
      ].join(","),
    );
  return `${["id,name,lon,lat,elevation_m", ...lines].join("\n")}\n`;
}
