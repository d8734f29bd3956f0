import { METHOD_NAMES, VARIOGRAM_SHAPES } from "@rainreckon/adjustment";
import { SCREENS } from "@rainreckon/core";
import { z } from "zod";

/** An instant with its offset or Z: a plan never holds a time that depends on where it is read. */
const instant = z.iso
  .datetime({ offset: true, error: 'write an instant with Z or an offset, like "2031-05-03T12:00:00Z"' })
  .describe("an instant, ISO 8601 with Z or an offset");
/** The relation of a plan in which nobody has chosen one. */
export const DEFAULT_RELATION = "marshall-1955-200/1.6";

const duration = z
  .string()
  .regex(
    /^P(?=\d|T\d)(\d+D)?(T(?=\d)(\d+H)?(\d+M)?(\d+S)?)?$/,
    'write a duration like "PT1H", "PT5M" or "P1D"',
  )
  .describe("an ISO 8601 duration");
const zone = z.string().min(1).describe('"UTC", a fixed offset like "UTC+01:00", or an IANA zone');
const dst = z
  .enum(["follow", "never"])
  .describe("follow: the zone's clock changes count; never: its standard time all year");

/** A hail cap, given one way; the other is worked out for the relation in use and always shown beside it. */
const cap = z.union([
  z.strictObject({ dbz: z.number().min(30).max(80) }),
  z.strictObject({ mmPerHour: z.number().min(1).max(1000) }),
]);

/** The name of a catalogue relation, or coefficients of the user's own. */
const relation = z.union([
  z.string().min(1),
  z.strictObject({ a: z.number().positive(), b: z.number().positive(), source: z.string().min(1) }),
]);

const radar = z.strictObject({
  id: z.string().min(1),
  use: z.boolean().default(true),
  /** Added to every dBZ of this radar before the relation. */
  offsetDb: z.number().min(-20).max(20).default(0),
  relation: relation.default(DEFAULT_RELATION),
  /** Other relations for parts of the window; from is excluded, to is included. */
  periods: z.array(z.strictObject({ from: instant, to: instant, relation })).default([]),
  cap: cap.default({ dbz: 53 }),
  /** Highest beam centre above the antenna at which a sweep still speaks for the ground. */
  maxBeamHeightM: z.number().min(100).max(20000).default(3000),
  /** Usual time between rounds, and the longest hole that is bridged. */
  medianRoundMinutes: z.number().positive(),
  maxGapMinutes: z.number().positive(),
  /** Only where the files do not say. */
  beamWidthDeg: z.number().positive().max(20).optional(),
  wavelengthCm: z.number().positive().max(200).optional(),
  site: z
    .strictObject({
      lonDeg: z.number().min(-180).max(180),
      latDeg: z.number().min(-90).max(90),
      /** Of the antenna, above mean sea level. */
      antennaHeightM: z.number().min(-500).max(9000),
    })
    .optional(),
  /** True takes a radar of Ku band or shorter waves into the total all the same. */
  acceptShortWavelength: z.boolean().default(false),
  /** The moment that rain is made from. */
  moment: z.string().min(1).default("DBZH"),
  /** Sectors where a hill or a building stands in the beam; sweeps up to that elevation do not speak there. */
  blockedSectors: z
    .array(
      z.strictObject({
        fromAzimuthDeg: z.number().min(0).max(360),
        toAzimuthDeg: z.number().min(0).max(360),
        upToElevationDeg: z.number().min(-2).max(90),
        reason: z.string().min(1),
      }),
    )
    .default([]),
});

/** Rain or reflectivity that is on a grid already: composites, CF NetCDF, GeoTIFF. */
const grids = z.strictObject({
  /** Name of this source in every output. */
  id: z.string().min(1),
  files: z.array(z.string().min(1)).min(1),
  use: z.boolean().default(true),
  /** What is taken from the files; other layers in them are left out. */
  quantity: z.enum(["rate", "depth", "reflectivity"]),
  /** Usual time between layers, and the longest hole that is bridged. A depth speaks for its own span and needs neither. */
  medianStepMinutes: z.number().positive().optional(),
  maxGapMinutes: z.number().positive().optional(),
  /** Of reflectivity only: what is added to it, and how it becomes rain. */
  offsetDb: z.number().min(-20).max(20).default(0),
  relation: relation.default(DEFAULT_RELATION),
  cap: cap.default({ dbz: 53 }),
  /** Only where the files do not say: their coordinate system, and the time of one file. */
  crs: z.string().min(1).optional(),
  time: z.strictObject({ from: instant, to: instant }).optional(),
});

/** The columns of a table of stations; a WaterML file has none. */
const stationColumns = z.strictObject({
  id: z.string().min(1),
  name: z.string().min(1).optional(),
  x: z.string().min(1),
  y: z.string().min(1),
  elevation: z.string().min(1).optional(),
  /** Dates between which an entry holds, for gauges that moved. */
  validFrom: z.string().min(1).optional(),
  validTo: z.string().min(1).optional(),
  tipMm: z.string().min(1).optional(),
  heated: z.string().min(1).optional(),
  /** What the network has corrected already. */
  corrections: z.string().min(1).optional(),
});

const encoding = z
  .enum(["utf-8", "utf-16le", "utf-16be", "windows-1252"])
  .optional()
  .describe("how characters are written; found from the bytes where left out; Latin-1 is windows-1252");
const headerLine = z
  .number()
  .int()
  .min(1)
  .max(200)
  .optional()
  .describe("line with the names of the columns, from 1; the first one with text where left out");
const decimal = z.enum(["point", "comma"]).default("point");

const gaugeFiles = z.strictObject({
  network: z.string().min(1),
  files: z.array(z.string().min(1)).min(1),
  /** May be left out for WaterML files that give the positions themselves. */
  stations: z
    .strictObject({
      file: z.string().min(1),
      /** Coordinate system of the stations' x and y; longitude and latitude where left out. */
      crs: z.string().min(1).default("EPSG:4326"),
      columns: stationColumns,
      encoding,
      headerLine,
      decimal,
      dates: z.enum(["ymd", "dmy", "mdy", "serial-1900"]).default("ymd"),
    })
    .optional(),
  layout: z.enum(["long", "wide", "waterml2"]),
  columns: z
    .strictObject({
      gauge: z.string().min(1).optional(),
      /** Column of dates, where the time column holds the time of day alone. */
      date: z.string().min(1).optional(),
      time: z.string().min(1).optional(),
      value: z.string().min(1).optional(),
      quality: z.string().min(1).optional(),
    })
    .prefault({}),
  /** Where the gauge's id stands: in a column (or the headers), the file's name, or above the header. */
  idFrom: z.enum(["column", "file", "label"]).default("column"),
  fileName: z
    .string()
    .regex(/^[^{}]*\{id\}[^{}]*$/, 'write a pattern with one {id}, like "rain_{id}_*"')
    .optional()
    .describe("the file's name without its ending: {id} is the id, * anything"),
  /** Text before the id in a line above the header. */
  label: z.string().min(1).max(100).optional(),
  kind: z.enum(["increments", "counter", "intensity", "tips"]),
  unit: z.enum(["mm", "in", "mm/h", "in/h", "tips"]),
  /** Depth of one tip, for tips. */
  tipMm: z.number().positive().optional(),
  stepMinutes: z.number().positive().optional(),
  stamp: z.enum(["end", "start"]).default("end"),
  zone: zone.default("UTC"),
  dst: dst.default("follow"),
  dates: z
    .enum(["ymd", "dmy", "mdy", "serial-1900", "ask"])
    .default("ymd")
    .describe(
      "order of the dates: ymd, dmy, mdy, or serial-1900 for day numbers of a spreadsheet; ask: not settled, nothing is read",
    ),
  dayHour: z
    .union([z.number().int().min(0).max(23), z.literal("ask")])
    .optional()
    .describe("hour from 0 to 23 at which days begin, for stamps without a time of day"),
  encoding,
  headerLine,
  decimal,
  /** What no line means: dry, missing, or dry as long as something came within the time given. */
  silence: z
    .string()
    .regex(/^(dry|missing|heartbeat P\S+)$/, 'write "dry", "missing" or "heartbeat PT60M"')
    .default("missing"),
  missing: z.array(z.string()).default(["", "NaN", "-999"]),
  /** What "<0.2" counts as. */
  below: z.enum(["zero", "missing"]).default("zero"),
  /** Cells that mean rain too little to measure: 0 mm, and counted. */
  trace: z.array(z.string().min(1)).default(["T", "Tr"]),
  quality: z
    .strictObject({
      use: z.array(z.string()).default([]),
      doubt: z.array(z.string()).default([]),
      drop: z.array(z.string()).default([]),
      /** Readings that cover all the time since the gauge's last value. */
      accumulated: z.array(z.string()).default([]),
    })
    .optional(),
  /** Fall of a counter, in mm, that is taken for jitter and not for a reset. */
  counterJitterMm: z.number().min(0).max(10).default(0.3),
  /** Level, in the file's unit, at which the counter starts again from 0; never where left out. */
  counterRollsOverAt: z.number().positive().optional(),
  /** What the network calls its readings, and the day on which they were fetched. */
  status: z.enum(["provisional", "final", "unknown"]).default("unknown"),
  retrieved: z.iso.date().optional().describe("a day like 2031-05-03"),
});

/** Points that figures are asked for, such as pumps and works. */
const assets = z.strictObject({
  file: z.string().min(1),
  /** Coordinate system of x and y; longitude and latitude where left out. */
  crs: z.string().min(1).default("EPSG:4326"),
  columns: z.strictObject({
    id: z.string().min(1),
    name: z.string().min(1).optional(),
    x: z.string().min(1),
    y: z.string().min(1),
  }),
  encoding,
  headerLine,
  decimal,
});

/** From echo to rain: what is screened and corrected before the relation. Each step can be switched off. */
const echo = z.strictObject({
  screening: z
    .strictObject({
      use: z.boolean().default(true),
      /** Screens that are not used. */
      without: z.array(z.enum(SCREENS)).default([]),
      /** What takes the place of a screened gate: its neighbours, or nothing; then the sweep above may speak. */
      fill: z.enum(["neighbours", "none"]).default("neighbours"),
    })
    .prefault({}),
  blockage: z
    .strictObject({
      use: z.boolean().default(true),
      /** Heights of the ground, GeoTIFF in metres above mean sea level. */
      terrain: z.string().min(1).optional(),
      /** Share of the beam that may be hidden and is still corrected. */
      limit: z.number().min(0).max(0.9).default(0.7),
    })
    .prefault({}),
  gas: z
    .strictObject({
      /** if-told: where the file says that nothing was taken off for the air. */
      use: z.enum(["if-told", "always", "never"]).default("if-told"),
      temperatureC: z.number().min(-40).max(50).default(15),
      pressureHpa: z.number().min(500).max(1100).default(1013),
      humidityPercent: z.number().min(0).max(100).default(60),
    })
    .prefault({}),
  attenuation: z
    .strictObject({
      method: z.enum(["auto", "linear", "zphi", "hitschfeld-bordan", "none"]).default("auto"),
      /** Two-way loss per degree of PHIDP; learned from the scans or of the band where left out. */
      dbPerDeg: z.number().positive().max(1).optional(),
    })
    .prefault({}),
  profile: z
    .strictObject({
      use: z.boolean().default(true),
      /** Height of 0 °C above mean sea level; found in the scans where left out. */
      freezingHeightAslM: z.number().min(-500).max(8000).optional(),
    })
    .prefault({}),
  rate: z
    .strictObject({
      /** Showers and widespread rain are told apart. */
      rainType: z.boolean().default(true),
      /** KDP and ZDR take part where they hold. */
      polarimetric: z.boolean().default(true),
      hail: z.boolean().default(true),
      /** Relations for the one and the other; the radar's own where left out. */
      convective: relation.optional(),
      stratiform: relation.optional(),
    })
    .prefault({}),
});

/** The plan of a run: everything that decides a figure, and nothing that does not. */
export const planSchema = z.strictObject({
  title: z.string().min(1).max(200),
  reference: z.string().max(200).default(""),
  author: z.string().max(200).default(""),
  status: z.enum(["provisional", "final"]).default("provisional"),
  window: z.strictObject({ from: instant, to: instant, zone: zone.default("UTC") }),
  /** Scans and radars, or grids, or both. */
  scans: z.array(z.string().min(1)).default([]),
  radars: z.array(radar).default([]),
  grids: z.array(grids).default([]),
  gauges: z.array(gaugeFiles).default([]),
  catchments: z
    .strictObject({
      file: z.string().min(1),
      id: z.string().min(1),
      name: z.string().min(1).optional(),
      crs: z.string().min(1).optional(),
      /** Of a GeoPackage; needed where it has several of polygons. */
      layer: z.string().min(1).optional(),
    })
    .optional(),
  assets: assets.optional(),
  /** How rain is cut into events; the usual rule where left out. */
  events: z
    .strictObject({
      dryTime: duration.optional().describe("dry time from which on a new event begins"),
      minDepthMm: z.number().min(0).max(1000).optional(),
      /** Whose rule it is: a contract, a guideline with its edition. */
      rule: z.string().min(1).max(200).optional(),
    })
    .optional(),
  intervals: z
    .strictObject({
      grids: duration.default("PT1H"),
      series: duration.default("PT5M"),
      rainDay: z
        .strictObject({
          hour: z.number().int().min(0).max(23),
          zone,
          dst,
          label: z.enum(["start", "end"]),
        })
        .optional(),
    })
    .prefault({}),
  adjustment: z
    .strictObject({
      /** A method by name, or the one that meets held-out gauges best. */
      method: z.enum([...METHOD_NAMES, "by-cross-validation"]).default("by-cross-validation"),
      /** Fields are learned once for the window, with the radar's shape in time, or anew for each interval of the pairs. */
      over: z.enum(["window", "intervals"]).default("window"),
      minGauges: z.number().int().min(5).default(5),
      minGaugeSumMm: z.number().min(10).default(10),
      factorLimits: z.tuple([z.number().positive(), z.number().positive()]).default([0.1, 10]),
      /** Shape of the variogram that kriging methods fit. */
      variogram: z.enum(VARIOGRAM_SHAPES).default("spherical"),
      /** Error of a gauge's window depth, in per cent of it. */
      gaugeErrorPercent: z.number().min(0).max(50).default(5),
      /** The log bias in time: its memory from one pair interval to the next, its variance, and that of one pair. */
      kalman: z
        .strictObject({
          memory: z.number().gt(0).max(1).default(0.9),
          variance: z.number().positive().max(10).default(0.09),
          pairVariance: z.number().positive().max(100).default(0.25),
        })
        .prefault({}),
    })
    .prefault({}),
  overrides: z
    .array(
      z.strictObject({
        network: z.string().min(1),
        gauge: z.string().min(1),
        verdict: z.enum(["use", "leave-out"]),
        reason: z.string().min(1),
        by: z.string().min(1),
        date: z.iso.date(),
      }),
    )
    .default([]),
  grid: z.strictObject({
    crs: z.string().min(1),
    westM: z.number(),
    northM: z.number(),
    cellM: z.number().min(50).max(50000),
    nx: z.number().int().min(1).max(4000),
    ny: z.number().int().min(1).max(4000),
  }),
  rain: z
    .strictObject({
      minRateMmPerHour: z.number().min(0).max(10).default(0.1),
      effectiveRadiusFactor: z
        .number()
        .min(0.5)
        .max(5)
        .default(4 / 3),
      minObserved: z.number().min(0).max(1).default(0.9),
      /** Width over which a radar's weight falls to 0 at the end of its coverage. */
      taperKm: z.number().min(0).max(100).default(10),
      /** A sweep sent twice with different content: which one counts. */
      resent: z.enum(["first", "last"]).default("last"),
      /** Relations that the headline is also given under. */
      headlineRelations: z
        .array(z.string().min(1))
        .default(["marshall-1955-200/1.6", "fulton-1998-300/1.4", "rosenfeld-1993-250/1.2"]),
    })
    .prefault({}),
  echo: echo.prefault({}),
  pairs: z
    .strictObject({
      cell: z.enum(["nearest", "mean3x3"]).default("nearest"),
      interval: duration.default("PT1H"),
      thresholdMm: z.number().positive().default(0.2),
      thresholdsMm: z.array(z.number().positive()).default([0.2, 1, 5]),
      minCommonFraction: z.number().min(0.1).max(1).default(0.5),
      rangeBandsKm: z.array(z.number().positive()).default([50, 100, 150]),
    })
    .prefault({}),
  bootstrap: z
    .strictObject({
      seed: z.number().int().min(0).default(1),
      samples: z.number().int().min(100).max(100000).default(1000),
      blockMinutes: z.number().positive().default(60),
      level: z.number().gt(0).lt(1).default(0.9),
    })
    .prefault({}),
});

export type Plan = z.output<typeof planSchema>;
export type PlanEcho = Plan["echo"];
export type PlanRadar = Plan["radars"][number];
export type PlanGrids = Plan["grids"][number];
export type PlanGaugeFiles = Plan["gauges"][number];
