import { clockZone, durationMs } from "@rainreckon/accumulation";
import { findRelation, InputError } from "@rainreckon/core";
import { isDynamicPattern } from "tinyglobby";
import type { PlanFault } from "./faults.ts";
import type { Plan, PlanGaugeFiles, PlanGrids } from "./schema.ts";
import type { PlanPath } from "./yaml-place.ts";
import { findZone } from "./zone.ts";

const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;

/** What no single value of a plan can tell: values that contradict each other, and names that lead nowhere. */
export function crossChecks(plan: Plan): PlanFault[] {
  return [
    ...windowFaults(plan),
    ...durationFaults(plan),
    ...relationFaults(plan),
    ...sourceFaults(plan),
    ...plan.grids.flatMap(gridsFaults),
    ...plan.gauges.flatMap(gaugeFaults),
    ...zoneFaults(plan),
    ...limitFaults(plan),
  ];
}

function windowFaults(plan: Plan): PlanFault[] {
  const { from, to, zone } = plan.window;
  const fromMs = Date.parse(from);
  const toMs = Date.parse(to);
  if (!(fromMs < toMs)) {
    return [
      {
        path: ["window", "from"],
        what: `the window ends (${to}) before it starts (${from})`,
        fix: "put from before to",
      },
    ];
  }
  const stepMs = durationMs(plan.intervals.series);
  const faults: PlanFault[] = [];
  if ((toMs - fromMs) % stepMs !== 0) {
    faults.push({
      path: ["window", "to"],
      what: `the window is no whole number of steps of ${plan.intervals.series}`,
      fix: "move from or to, or change intervals.series",
    });
  }
  // A step may be whole on the local clock and not in UTC (zones at half hours), or the other way round.
  const localShiftMs = (findZone(zone)?.offset(fromMs) ?? 0) * 60_000;
  if (fromMs % stepMs !== 0 && (fromMs + localShiftMs) % stepMs !== 0) {
    faults.push({
      path: ["window", "from"],
      what: `the window starts in the middle of a step of ${plan.intervals.series}`,
      fix: "start at a whole step after midnight, UTC or local",
    });
  }
  return faults;
}

function durationFaults(plan: Plan): PlanFault[] {
  const faults: PlanFault[] = [];
  const seriesMs = durationMs(plan.intervals.series);
  const named: [PlanPath, string][] = [
    [["intervals", "series"], plan.intervals.series],
    [["intervals", "grids"], plan.intervals.grids],
    [["pairs", "interval"], plan.pairs.interval],
  ];
  for (const [path, text] of named) {
    const lengthMs = durationMs(text);
    if (!(DAY_MS % lengthMs === 0)) {
      faults.push({
        path,
        what: `${text} does not divide a day`,
        fix: "write a length that fits whole into 24 hours",
      });
    } else if (lengthMs % seriesMs !== 0) {
      faults.push({
        path,
        what: `${text} is no whole number of steps of ${plan.intervals.series} (intervals.series)`,
        fix: "write a multiple of it, or a shorter intervals.series",
      });
    }
  }
  const { rainDay } = plan.intervals;
  const zone = rainDay === undefined ? undefined : findZone(rainDay.zone);
  if (rainDay !== undefined && zone !== undefined) {
    const fromMs = Date.parse(plan.window.from);
    // A day that starts within a step would lose that step, and look as if it had not been observed. The clock may
    // change in the window.
    const startsWithin = [fromMs, Date.parse(plan.window.to)].some((at) => {
      const clock = clockZone(rainDay.zone, rainDay.dst, new Date(at).getUTCFullYear());
      const dayStartMs = rainDay.hour * HOUR_MS - clock.offset(at) * 60_000;
      return (dayStartMs - fromMs) % seriesMs !== 0;
    });
    if (startsWithin) {
      faults.push({
        path: ["intervals", "rainDay"],
        what: `rain days at ${rainDay.hour}:00 in ${zone.name} start within a step of ${plan.intervals.series}`,
        fix: "write a shorter intervals.series, such as PT15M",
      });
    }
  }
  return faults;
}

function relationFaults(plan: Plan): PlanFault[] {
  const faults: PlanFault[] = [];
  const check = (name: Plan["radars"][number]["relation"], path: PlanPath) => {
    if (typeof name !== "string") return;
    try {
      findRelation(name);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      faults.push({ path, what: error.what, fix: error.fix });
    }
  };
  plan.radars.forEach((radar, index) => {
    check(radar.relation, ["radars", index, "relation"]);
    radar.periods.forEach((period, at) => {
      const path = ["radars", index, "periods", at];
      check(period.relation, [...path, "relation"]);
      if (!(Date.parse(period.from) < Date.parse(period.to))) {
        faults.push({
          path: [...path, "from"],
          what: "the period ends before it starts",
          fix: "put from before to",
        });
      }
      const earlier = radar.periods.slice(0, at);
      if (earlier.some((other) => overlap(other, period))) {
        faults.push({
          path,
          what: "two periods of one radar overlap",
          fix: "let each end where the next starts",
        });
      }
    });
  });
  plan.grids.forEach((source, index) => {
    check(source.relation, ["grids", index, "relation"]);
  });
  plan.rain.headlineRelations.forEach((name, index) => {
    check(name, ["rain", "headlineRelations", index]);
  });
  return faults;
}

interface Span {
  readonly from: string;
  readonly to: string;
}

function overlap(a: Span, b: Span): boolean {
  return Date.parse(a.from) < Date.parse(b.to) && Date.parse(b.from) < Date.parse(a.to);
}

/** Where rain comes from: there must be something, and each source has a name of its own. */
function sourceFaults(plan: Plan): PlanFault[] {
  const faults: PlanFault[] = [];
  const seen = new Set<string>();
  plan.radars.forEach((radar, index) => {
    if (seen.has(radar.id)) {
      faults.push({
        path: ["radars", index, "id"],
        what: `radar "${radar.id}" stands in the plan twice`,
        fix: "delete one of the two",
      });
    }
    seen.add(radar.id);
  });
  plan.grids.forEach(({ id }, index) => {
    if (seen.has(id)) {
      faults.push({
        path: ["grids", index, "id"],
        what: `two sources are called "${id}"`,
        fix: "give each radar and each entry of grids a name of its own",
      });
    }
    seen.add(id);
  });
  if (plan.radars.length > 0 && plan.scans.length === 0) {
    faults.push({
      path: ["radars"],
      what: "there are radars, but no scans",
      fix: "add scans, or delete radars",
    });
  }
  if (plan.radars.length + plan.grids.length === 0) {
    faults.push({
      path: ["radars"],
      what: "nothing says where rain comes from",
      fix: "add scans and radars, or grids",
    });
  } else if ([...plan.radars, ...plan.grids].every(({ use }) => !use)) {
    faults.push({
      path: [plan.radars.length > 0 ? "radars" : "grids"],
      what: plan.radars.length > 0 ? "no radar is in use" : "no entry of grids is in use",
      fix: "set use: true for one at least",
    });
  }
  return faults;
}

function gridsFaults(source: PlanGrids, index: number): PlanFault[] {
  const faults: PlanFault[] = [];
  const path = ["grids", index];
  const needed = ["medianStepMinutes", "maxGapMinutes"] as const;
  if (source.quantity !== "depth") {
    for (const key of needed) {
      if (source[key] !== undefined) continue;
      faults.push({
        path,
        what: `a ${source.quantity} at instants needs ${key}`,
        fix: `add ${key}; survey shows the time between layers`,
      });
    }
  }
  if (source.time !== undefined) {
    const [from, to] = [Date.parse(source.time.from), Date.parse(source.time.to)];
    if (from > to || (from === to && source.quantity === "depth")) {
      faults.push({
        path: [...path, "time"],
        what: `it ends (${source.time.to}) before there is any of it`,
        fix: "put from before to",
      });
    }
    if (source.files.length > 1 || isDynamicPattern(source.files[0])) {
      faults.push({
        path: [...path, "time"],
        what: "one time cannot hold for several files",
        fix: "name one file, without * or ?, in an entry of its own",
      });
    }
  }
  return faults;
}

function gaugeFaults(files: PlanGaugeFiles, index: number): PlanFault[] {
  const faults: PlanFault[] = [];
  const path = ["gauges", index];
  if (files.layout !== "waterml2" && files.columns.time === undefined) {
    faults.push({
      path: [...path, "columns"],
      what: "a table needs the column that holds the time",
      fix: "add columns.time, or write layout: waterml2",
    });
  }
  if (files.layout !== "waterml2" && files.stations === undefined) {
    faults.push({
      path,
      what: "nothing says where the gauges stand",
      fix: "add stations: {file, columns: {id, x, y}}",
    });
  }
  if (files.idFrom !== "column" && files.layout !== "long") {
    faults.push({
      path: [...path, "idFrom"],
      what: `idFrom: ${files.idFrom} and layout: ${files.layout} do not go together`,
      fix: "write layout: long, or take idFrom out",
    });
  }
  if (files.idFrom === "label" && files.label === undefined) {
    faults.push({
      path: [...path, "idFrom"],
      what: "idFrom: label needs the text before the id",
      fix: "add label",
    });
  }
  const namesGauges = files.columns.gauge !== undefined || files.idFrom !== "column";
  if (
    files.layout === "long" &&
    (!namesGauges || (files.columns.value === undefined && files.kind !== "tips"))
  ) {
    faults.push({
      path: [...path, "columns"],
      what: "a long layout needs the columns that hold the gauge and the value",
      fix: "add columns.gauge and columns.value, or write layout: wide",
    });
  }
  const rateUnit = files.unit === "mm/h" || files.unit === "in/h";
  if (rateUnit !== (files.kind === "intensity")) {
    faults.push({
      path: [...path, "unit"],
      what: `kind ${files.kind} and unit ${files.unit} do not go together`,
      fix: "intensity is in mm/h or in/h, everything else in mm, in or tips",
    });
  }
  if (files.unit === "tips" && files.tipMm === undefined) {
    faults.push({
      path,
      what: "tips are counted, but their depth is not given",
      fix: "add tipMm, the depth of one tip in mm",
    });
  }
  if (files.quality !== undefined && files.columns.quality === undefined) {
    faults.push({
      path: [...path, "quality"],
      what: "quality codes are given, but no column that holds them",
      fix: "add columns.quality, or delete quality",
    });
  }
  const heartbeat = /^heartbeat (.+)$/.exec(files.silence)?.[1];
  if (heartbeat !== undefined && Number.isNaN(durationMs(heartbeat))) {
    faults.push({
      path: [...path, "silence"],
      what: `"${heartbeat}" is no duration`,
      fix: 'write it like "heartbeat PT60M"',
    });
  }
  return faults;
}

function zoneFaults(plan: Plan): PlanFault[] {
  const named: [PlanPath, string | undefined][] = [
    [["window", "zone"], plan.window.zone],
    [["intervals", "rainDay", "zone"], plan.intervals.rainDay?.zone],
    ...plan.gauges.map((files, index): [PlanPath, string] => [["gauges", index, "zone"], files.zone]),
  ];
  return named.flatMap(([path, name]) =>
    name === undefined || findZone(name) !== undefined
      ? []
      : [
          {
            path,
            what: `there is no zone "${name}"`,
            fix: 'write "UTC", an offset like "UTC+01:00", or an IANA zone like "Europe/Oslo"',
          },
        ],
  );
}

function limitFaults({ adjustment, pairs, intervals }: Plan): PlanFault[] {
  const faults: PlanFault[] = [];
  const [low, high] = adjustment.factorLimits;
  if (!(low < high)) {
    faults.push({
      path: ["adjustment", "factorLimits"],
      what: "the lower limit is not below the upper",
      fix: "write them as [0.1, 10]",
    });
  }
  if (adjustment.over === "intervals" && durationMs(pairs.interval) !== durationMs(intervals.grids)) {
    faults.push({
      path: ["adjustment", "over"],
      what: `the adjustment works on intervals, but pairs are of ${pairs.interval} and maps of ${intervals.grids}`,
      fix: "make pairs.interval and intervals.grids the same, or write over: window",
    });
  }
  return faults;
}
