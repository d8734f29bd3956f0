import { durationMs } from "@rainreckon/accumulation";
import type { CapSetting } from "@rainreckon/core";
import { RELATION_FITS } from "@rainreckon/verification";
import { InvalidArgumentError, Option } from "commander";
import { z } from "zod";
import type { LonLat } from "./explain/places-asked.ts";
import { parsePosition } from "./explain/position.ts";

/** Reads a flag's value through a schema; what the schema says becomes the message. */
function through<T>(schema: z.ZodType<T>): (value: string) => T {
  return (value) => {
    const parsed = schema.safeParse(value);
    if (parsed.success) return parsed.data;
    throw new InvalidArgumentError(parsed.error.issues[0]?.message ?? "it does not fit");
  };
}

function wholeNumber(least: number, most: number): z.ZodType<number> {
  const error = `write a whole number from ${least} to ${most}`;
  return z
    .string()
    .regex(/^\d+$/, error)
    .transform(Number)
    .refine((value) => value >= least && value <= most, error);
}

const MAX_LEVELS = 400;

/** "15..60", "15..60..2.5" or "20,30,40" as reflectivities in dBZ. */
const reflectivityList = z.string().transform((text, context) => {
  const range = /^(-?\d+(?:\.\d+)?)\.\.(-?\d+(?:\.\d+)?)(?:\.\.(\d+(?:\.\d+)?))?$/.exec(text);
  const levels: number[] = [];
  if (range !== null) {
    const [from, to, step] = [Number(range[1]), Number(range[2]), Number(range[3] ?? 5)];
    const steps = step > 0 ? Math.floor((to - from) / step + 1e-9) : -1;
    for (let index = 0; index <= Math.min(steps, MAX_LEVELS); index += 1) levels.push(from + index * step);
  } else if (/^-?\d+(\.\d+)?(,-?\d+(\.\d+)?)*$/.test(text)) {
    levels.push(...text.split(",").map(Number));
  }
  if (levels.length === 0 || levels.length > MAX_LEVELS || levels.some((dbz) => dbz < -40 || dbz > 90)) {
    context.addIssue({
      code: "custom",
      message: 'write "15..60", "15..60..2.5" or "20,30,40", between -40 and 90 dBZ',
    });
    return z.NEVER;
  }
  return levels;
});

/** A hail cap as plans hold it: "53dBZ" or "100mm/h". */
const capValue = z.string().transform((text, context): { dbz: number } | { mmPerHour: number } => {
  const parts = /^(\d+(?:\.\d+)?)\s*(dBZ|mm\/h)$/i.exec(text);
  const value = Number(parts?.[1]);
  const inDbz = parts?.[2]?.toLowerCase() === "dbz";
  if (parts === null || value < (inDbz ? 30 : 1) || value > (inDbz ? 80 : 1000)) {
    context.addIssue({ code: "custom", message: 'write "53dBZ" (30 to 80) or "100mm/h" (1 to 1000)' });
    return z.NEVER;
  }
  return inDbz ? { dbz: value } : { mmPerHour: value };
});

/** Caps with commas; "none" is no cap. */
const capList = z.string().transform((text, context): readonly (CapSetting | "none")[] => {
  const caps = text
    .split(",")
    .map((one) => (one === "none" ? ("none" as const) : capValue.safeParse(one).data));
  if (caps.some((one) => one === undefined)) {
    context.addIssue({ code: "custom", message: 'write caps with commas, like "50dBZ,100mm/h,none"' });
    return z.NEVER;
  }
  return caps as (CapSetting | "none")[];
});

/** A number between two ends, both allowed; an end that is open says so in words. */
function numberFrom(least: number, most: number, words: string): (value: string) => number {
  return through(
    z
      .string()
      .regex(/^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i, words)
      .transform(Number)
      .refine((value) => value >= least && value <= most, words),
  );
}

/** A list of numbers with commas, ascending and each once, between two ends. */
function ascendingList(least: number, most: number, words: string): (value: string) => readonly number[] {
  return through(
    z
      .string()
      .regex(/^\d+(\.\d+)?(,\d+(\.\d+)?)*$/, words)
      .transform((text) => [...new Set(text.split(",").map(Number))].sort((a, b) => a - b))
      .refine((list) => list.every((value) => value >= least && value <= most), words),
  );
}

const bandLetters = z
  .string()
  .regex(/^(S|C|X)(,(S|C|X))*$/i, 'write S, C or X, or several with commas: "S,C,X"')
  .transform((text) => [...new Set(text.toUpperCase().split(","))]);

/** Heights of a layer, "1800..2300". */
const layerHeights = z
  .string()
  .regex(/^\d+(\.\d+)?\.\.\d+(\.\d+)?$/, 'write bottom..top in m, like "1800..2300"')
  .transform((text) => {
    const [bottomM, topM] = text.split("..").map(Number) as [number, number];
    return { bottomM, topM };
  })
  .refine(({ bottomM, topM }) => bottomM < topM && topM <= 20_000, "the top must lie above the bottom");

/** One length of time as ISO 8601 writes it, in ms. */
const lengthOfTime = z
  .string()
  .transform(durationMs)
  .refine((ms) => ms >= 60_000, "write a length such as PT30M, PT6H or P1D, from a minute on");

/** Durations in minutes, or as ISO 8601 writes them, with commas: ms, ascending, each once. */
const durationList = z.string().transform((text, context): readonly number[] => {
  const list = text
    .split(",")
    .map((one) => (/^\d+$/.test(one.trim()) ? Number(one) * 60_000 : durationMs(one.trim())));
  if (list.length <= 100 && list.every((ms) => ms >= 60_000 && ms <= 366 * 86_400_000))
    return [...new Set(list)].sort((a, b) => a - b);
  context.addIssue({
    code: "custom",
    message: 'write durations in minutes, or as lengths of time, with commas: "5,15,60" or "PT5M,PT1H,P1D"',
  });
  return z.NEVER;
});

/** A file that a chart is written to; its ending says what it holds. */
const chartFile = z.string().regex(/\.(svg|html)$/i, "name a file that ends in .svg or .html");

/** Gathers a flag that may be given several times. */
function several<T>(
  read: (value: string) => T,
): (value: string, before: readonly T[] | undefined) => readonly T[] {
  return (value, before = []) => [...before, read(value)];
}

const position = z.string().transform((text, context): LonLat => {
  const found = parsePosition(text);
  if (found !== undefined) return found;
  context.addIssue({
    code: "custom",
    message: 'write a latitude and a longitude with their letters: "51.20N 4.10E"',
  });
  return z.NEVER;
});

const INSTANT_WORDS = "write an instant with its offset from UTC, like 2031-05-20T12:00Z";

/** An instant with its offset from UTC: without one nobody knows which. */
const instant = z
  .string()
  .regex(/^\d{4}-\d\d-\d\dT\d\d:\d\d(:\d\d)?(Z|[+-]\d\d:\d\d)$/, INSTANT_WORDS)
  .transform((text) => Date.parse(text))
  .refine(Number.isFinite, INSTANT_WORDS);

/** A length of time in whole minutes up to a day, as ISO 8601 writes it. */
const stepLength = z
  .string()
  .refine(
    (text) => durationMs(text) >= 60_000,
    "write a length such as PT15M, PT1H or P1D, from a minute on",
  );

/** "3h", "90min" or an ISO 8601 duration, as milliseconds. */
const timeSpan = z.string().transform((text, context): number => {
  const parts = /^(\d{1,4})\s*(h|min)$/.exec(text);
  const ms = parts === null ? durationMs(text) : Number(parts[1]) * (parts[2] === "h" ? 3_600_000 : 60_000);
  if (ms >= 300_000) return ms;
  context.addIssue({ code: "custom", message: 'write a length of time from 5 min on: "3h", "90min", PT3H' });
  return z.NEVER;
});

/** "UTC" or "+01:00" as minutes. */
const clockOffset = z.string().transform((text, context): number => {
  const parts = /^([+-])(\d\d):([0-5]\d)$/.exec(text);
  const minutes = parts === null ? Number.NaN : Number(parts[2]) * 60 + Number(parts[3]);
  if (text === "UTC") return 0;
  if (minutes <= 14 * 60) return parts?.[1] === "-" ? -minutes : minutes;
  context.addIssue({ code: "custom", message: 'write UTC, or an offset from it like "+01:00"' });
  return z.NEVER;
});

/** A code that nobody can take for a depth. */
const missingCode = z
  .string()
  .refine(
    (text) => /^(-[\d.]+|[A-Za-z]\w*)$/.test(text) && !(Number(text) >= 0),
    "write a negative number or a word, such as -999 or NaN: 0 and what is above it are depths",
  );

/** Every flag of every command, each once: name, unit, default, help text. */
export const flags = {
  // All commands
  json: () => new Option("--json", "result as JSON on stdout; everything else stays on stderr"),
  schema: () => new Option("--schema", "print the JSON schema of --json and stop"),
  quiet: () => new Option("-q, --quiet", "nothing on stderr but errors"),
  debug: () => new Option("--debug", "show the stack of an error"),
  noColour: () => new Option("--no-color", "no colours (the variable NO_COLOR does the same)"),

  // plan
  planFile: () => new Option("-o, --out <file>", "the plan to write").default("plan.yaml"),
  update: () => new Option("--update", "add what is new to an existing plan; edits and comments stay"),
  replacePlan: () => new Option("--force", "write over an existing plan"),
  title: () => new Option("--title <text>", "title of the plan").default("Rain total"),
  gridLike: () =>
    new Option(
      "--grid-like <file>",
      "lay the plan's grid cell upon cell with this raster (GeoTIFF, square cells in metres, EPSG code)",
    ),

  // total
  runFolder: () => new Option("--out <dir>", "folder for the results").makeOptionMandatory(),
  dryRun: () =>
    new Option("--dry-run", "say what would be done and what it takes: scans, memory, disk, minutes"),
  workers: () =>
    new Option("--workers <n>", "number of processors to use; the results are the same to the byte")
      .argParser(through(wholeNumber(1, 64)))
      .default(1),
  members: () =>
    new Option(
      "--members <n>",
      "write so many equally likely fields of the depth too, which spread as its error does: members/*.nc and members_catchments.csv",
    )
      .argParser(through(wholeNumber(0, 1000)))
      .default(0),
  despiteSpace: () =>
    new Option("--despite-space", "write members even where they may take more disk than is free"),
  rate: () =>
    new Option(
      "--rate",
      "a map of rain rate at one instant per radar (the last in the window) instead of a total",
    ),
  planRate: () =>
    new Option("--rate", "accept single scans: the plan is then for total --rate, a map of rain rate"),
  moveAside: () => new Option("--force", "move another run in that folder aside (nothing is deleted)"),
  strict: () => new Option("--strict", "exit with 1 when any input was left out"),

  // relate table
  dbz: () =>
    new Option("--dbz <list>", "reflectivities, dBZ: from..to, from..to..step, or a list with commas")
      .argParser(through(reflectivityList))
      .default(reflectivityList.parse("15..60"), "15..60, every 5"),
  relation: () =>
    new Option(
      "--relation <name...>",
      "only these relations, by name or as A,b (Z = A R^b, Z in mm6 m-3, R in mm/h)",
    ),
  cap: () =>
    new Option("--cap <cap>", "hail cap, in dBZ or mm/h: 53dBZ, 100mm/h")
      .argParser(through(capValue))
      .default({ dbz: 53 }, "53dBZ"),

  // relate fit, relate rank
  pairsFile: () =>
    new Option(
      "--pairs <file>",
      "fit to a table instead: columns reflectivity_dbz or z_mm6_per_m3, rain_rate_mm_per_h, and gauge and end where known",
    ),
  pairMinutes: () =>
    new Option(
      "--interval <min>",
      "length of a pair, minutes, whole steps; the plan's pair interval where left out",
    ).argParser(through(wholeNumber(1, 1440))),
  leastRate: () =>
    new Option("--least-rate <mm/h>", "what counts as rain, mm/h: lighter pairs enter no logarithm")
      .argParser(numberFrom(0.01, 10, "write a rate from 0.01 to 10 mm/h"))
      .default(0.1),
  fitReference: () =>
    new Option(
      "--relation <name>",
      "relation to stand beside, by name or as A,b; its b is the fixed one. The plan's where left out, else marshall-1955-200/1.6",
    ),
  fitMethod: () =>
    new Option("--method <name>", "the fit to offer for the plan, whatever the pairs can tell").choices([
      ...RELATION_FITS,
    ]),
  rankOrder: () =>
    new Option(
      "--order <mode>",
      "which errors decide: with the depths as they are, or after each one's own bias",
    )
      .choices(["alone", "after-bias"])
      .default("after-bias"),
  ownRelations: () =>
    new Option(
      "--relation <name...>",
      "only these relations, by name or as A,b; the plan's always takes part. All published ones for rain where left out",
    ),
  caps: () =>
    new Option("--caps <list>", "hail caps to rank too, in dBZ or mm/h, with commas: 50dBZ,100mm/h,none")
      .argParser(through(capList))
      .default(capList.parse("50dBZ,53dBZ,55dBZ,none"), "50dBZ,53dBZ,55dBZ,none"),

  // explain
  at: () =>
    new Option(
      "--at <place>",
      'a place, WGS 84: latitude and longitude with their letters, "51.20N 4.10E"; may be given several times',
    ).argParser(several(through(position))),
  gaugeAsked: () =>
    new Option(
      "--gauge <gauge>",
      "a gauge as NETWORK/ID, or ID where no other network has it; may be given several times",
    ).argParser(several((value) => value)),
  catchmentAsked: () =>
    new Option("--catchment <id>", "a catchment of the plan; may be given several times").argParser(
      several((value) => value),
    ),
  spanFrom: () =>
    new Option("--from <time>", "UTC; only what comes after it, in whole steps").argParser(through(instant)),
  spanTo: () =>
    new Option("--to <time>", "UTC; only what comes up to it, in whole steps").argParser(through(instant)),
  csv: () => new Option("--csv", "all rows as CSV on stdout, one a stretch between two scans"),
  planOfRun: () =>
    new Option("--plan <file>", "the plan of the run, where it and its inputs were moved away from the run"),

  // event
  assetAsked: () =>
    new Option(
      "--asset <id>",
      "an asset of the plan, or of --assets, by id or name; may be given several times",
    ).argParser(several((value) => value)),
  assetsFile: () =>
    new Option(
      "--assets <file>",
      "points in place of the plan's assets: CSV with the columns id, name, lon, lat (WGS 84, degrees)",
    ),
  frequencyTable: () =>
    new Option(
      "--frequency <file>",
      "your own table of return periods: CSV with duration_min, return_period_years, depth_mm[, low_mm, high_mm], and lines like # series: AMS, # kind: point, # source, # edition above the header",
    ),
  arealReduction: () =>
    new Option(
      "--areal-reduction <file>",
      "factors on point depths, for means over areas: CSV with duration_min, area_km2, factor",
    ),
  asSeries: () =>
    new Option(
      "--as-series <which>",
      "show periods of annual maxima (AMS) or of all exceedances (PDS), converted from the table's own by Langbein 1949",
    ).choices(["AMS", "PDS"]),
  dryTime: () =>
    new Option(
      "--dry-time <length>",
      "dry time from which on a new event begins; the plan's where left out, else PT6H (common practice)",
    ).argParser(through(lengthOfTime)),
  thresholdMm: () =>
    new Option(
      "--threshold-mm <mm>",
      "least depth of an event, mm; the plan's where left out, else 5 (house rule)",
    ).argParser(numberFrom(0, 1000, "write a depth from 0 to 1000 mm")),
  durations: () =>
    new Option(
      "--durations <list>",
      'durations of largest depths, minutes or lengths of time with commas: "5,15,60", "PT1H,P1D"; 5 min to 7 days where left out',
    ).argParser(through(durationList)),
  clockAligned: () =>
    new Option(
      "--clock-aligned",
      "only windows that begin at whole multiples of the duration from midnight (or the rain day's hour)",
    ),
  fromGrid: () =>
    new Option(
      "--from-grid",
      "take places that the run holds no steps of from the intervals of totals.nc, instead of making the run again",
    ),
  eventCsv: () => new Option("--csv", "largest depths of all places as CSV on stdout, one a row"),
  pages: () =>
    new Option(
      "--html",
      "a page for each place, and an index, in the folder of --out; they print and need no network",
    ),
  pagesFolder: () => new Option("--out <dir>", "folder for the pages of --html: a new or empty one"),
  bundleFile: () =>
    new Option(
      "--bundle <file>",
      "one archive (.tar.gz) of all that stands behind the figure of one place, and the command that makes it again",
    ),
  licence: () =>
    new Option(
      "--licence <text>",
      'licence of data in the bundle, "radar: CC BY 4.0" say; may be given several times',
    ).argParser(several((value) => value)),
  preparedBy: () =>
    new Option("--prepared-by <name>", "who prepared the bundle; a line to fill in where left out"),

  // check
  since: () =>
    new Option("--since <time>", "only so long before the newest scan: 3h, 90min").argParser(
      through(timeSpan),
    ),
  everyGauge: () => new Option("--all", "every gauge, not only what fits on a screen"),
  checkHtml: () => new Option("--html <file>", "write it as a page as well, with the evidence"),
  failOn: () =>
    new Option(
      "--fail-on <verdict>",
      "exit with 1 where a gauge or radar has this verdict or a worse one",
    ).choices(["leave-out", "care"]),

  // export
  outFile: () => new Option("-o, --out <file>", "the file to write").makeOptionMandatory(),
  outFolder: () => new Option("-o, --out <dir>", "the folder to write into").makeOptionMandatory(),
  overwrite: () => new Option("--force", "write over files that are there"),
  seriesOf: () =>
    new Option(
      "--of <places>",
      "whose depths: the mean over each catchment, the cell of each asset, or each member's catchments",
    )
      .choices(["catchments", "assets", "members"])
      .default("catchments"),
  step: () =>
    new Option(
      "--step <length>",
      "length of a step, PT15M or PT1H say; that of the run's series where left out",
    ).argParser(through(stepLength)),
  depthOrRate: () =>
    new Option("--as <what>", "depth of the step, or mean rate per hour over it")
      .choices(["depth", "rate"])
      .default("depth"),
  whichDepth: () =>
    new Option("--value <which>", "best is adjusted where there is an adjustment, else radar")
      .choices(["best", "radar", "adjusted"])
      .default("best"),
  stampAt: () =>
    new Option("--stamp <which>", "which end of the step its time stands for")
      .choices(["end", "start"])
      .default("end"),
  clockOffset: () =>
    new Option("--offset <offset>", "clock of the stamps and of whole steps: UTC, or +01:00 say, all year")
      .argParser(through(clockOffset))
      .default(0, "UTC"),
  missingCode: () =>
    new Option("--missing <code>", "what stands for a step that was not observed: never 0")
      .argParser(through(missingCode))
      .default("-999"),
  units: () => new Option("--units <unit>", "unit of depth").choices(["mm", "in"]).default("mm"),
  inches: () =>
    new Option("--units <unit>", "unit of depth; mm is what the run holds")
      .choices(["in"])
      .makeOptionMandatory(),

  // budget
  band: () =>
    new Option("--band <list>", "an example radar of a band, or several side by side: S, C, X").argParser(
      through(bandLetters),
    ),
  peakPower: () =>
    new Option("--peak-power <W>", "peak transmitted power, W").argParser(
      numberFrom(1e-3, 1e8, "write a power above 0 in W, up to 1e8"),
    ),
  gain: () =>
    new Option("--gain <dB>", "antenna gain, dB; from the beam width where left out").argParser(
      numberFrom(0, 80, "write a gain from 0 to 80 dB"),
    ),
  beamWidth: () =>
    new Option(
      "--beam-width <deg>",
      "half-power beam width, degrees; from gain or dish where left out",
    ).argParser(numberFrom(0.05, 20, "write a width from 0.05 to 20 degrees")),
  dish: () =>
    new Option("--dish <m>", "diameter of the dish, m: gives the beam width").argParser(
      numberFrom(0.1, 50, "write a diameter from 0.1 to 50 m"),
    ),
  pulse: () =>
    new Option("--pulse <us>", "pulse length, microseconds").argParser(
      numberFrom(0.01, 500, "write a length from 0.01 to 500 microseconds"),
    ),
  frequency: () =>
    new Option("--frequency <GHz>", "frequency, GHz").argParser(
      numberFrom(1, 110, "write a frequency from 1 to 110 GHz"),
    ),
  wavelength: () =>
    new Option("--wavelength <cm>", "wavelength, cm, in place of the frequency").argParser(
      numberFrom(0.28, 29.9, "write a wavelength from 0.28 to 29.9 cm"),
    ),
  noiseFigure: () =>
    new Option("--noise-figure <dB>", "noise figure of the receiver, dB").argParser(
      numberFrom(0, 30, "write a noise figure from 0 to 30 dB"),
    ),
  bandwidth: () =>
    new Option(
      "--bandwidth <MHz>",
      "bandwidth of the receiver, MHz; 1 over the pulse length where left out",
    ).argParser(numberFrom(1e-3, 1000, "write a bandwidth above 0 in MHz, up to 1000")),
  detection: () =>
    new Option(
      "--detection <dB>",
      "signal over noise that a detection needs, dB; below 0 where many pulses are averaged",
    )
      .argParser(numberFrom(-30, 30, "write a ratio from -30 to 30 dB"))
      .default(0),
  losses: () =>
    new Option("--losses <dB>", "losses inside the radar, transmit and receive together, dB").argParser(
      numberFrom(0, 60, "write a loss from 0 to 60 dB"),
    ),
  radome: () =>
    new Option(
      "--radome <dB>",
      "loss of the wet radome, BOTH ways, dB; measured ones: 3 dB dirty at C band and 15 mm/h, up to 5 dB at 50 mm/h",
    )
      .argParser(numberFrom(0, 40, "write a loss from 0 to 40 dB"))
      .default(0),
  prf: () =>
    new Option(
      "--prf <Hz>",
      "pulse repetition frequency, Hz: gives range and velocity without folding",
    ).argParser(numberFrom(1, 1e5, "write a frequency from 1 to 100000 Hz")),
  antennaHeight: () =>
    new Option("--antenna-height <m>", "height of the antenna above mean sea level, m").argParser(
      numberFrom(-450, 6000, "write a height from -450 to 6000 m"),
    ),
  elevation: () =>
    new Option("--elevation <deg>", "elevation of the beam, degrees; of a file its lowest sweep").argParser(
      numberFrom(-2, 90, "write an elevation from -2 to 90 degrees"),
    ),
  temperature: () =>
    new Option("--temperature <C>", "air at the antenna: temperature, degrees Celsius")
      .argParser(numberFrom(-60, 60, "write a temperature from -60 to 60 degrees Celsius"))
      .default(15),
  pressure: () =>
    new Option("--pressure <hPa>", "air at the antenna: total pressure, hPa")
      .argParser(numberFrom(300, 1100, "write a pressure from 300 to 1100 hPa"))
      .default(1013.25),
  humidity: () =>
    new Option("--humidity <percent>", "air at the antenna: relative humidity over water, %")
      .argParser(numberFrom(0, 100, "write a humidity from 0 to 100 %: above 100 air is beyond saturation"))
      .default(60),
  budgetRelation: () =>
    new Option("--relation <name>", "relation between Z and R, by name or as A,b (Z = A R^b)").default(
      "marshall-1955-200/1.6",
    ),
  rainKm: () =>
    new Option("--rain-km <km>", "length of the path through rain, km")
      .argParser(numberFrom(0.1, 300, "write a length from 0.1 to 300 km"))
      .default(20),
  ranges: () =>
    new Option("--ranges <list>", "slant ranges, km, with commas")
      .argParser(ascendingList(1, 500, 'write ranges from 1 to 500 km with commas, like "20,60,120"'))
      .default([10, 25, 50, 75, 100, 125, 150, 200, 250], "10,25,50,75,100,125,150,200,250"),
  meltingLayer: () =>
    new Option(
      "--melting-layer <m>",
      "bottom..top of the melting layer, m above mean sea level: adds the share of the echo that comes from it",
    ).argParser(through(layerHeights)),
  terrain: () =>
    new Option(
      "--terrain <file>",
      "terrain along one azimuth, CSV with the columns distance_km and height_asl_m in even steps: where the beam meets the ground",
    ),
  chart: () =>
    new Option("--chart <file>", "draw it: a file that ends in .svg or .html").argParser(through(chartFile)),
} as const;
