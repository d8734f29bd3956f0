import { TEXT_ENCODINGS } from "@rainreckon/formats";
import { z } from "zod";
import { manifestNotice } from "../manifest.ts";

const instant = z.iso.datetime();

const radarFinding = z.strictObject({
  id: z.string(),
  name: z.string().optional(),
  lonDeg: z.number(),
  latDeg: z.number(),
  antennaHeightM: z.number(),
  wavelengthCm: z.number().optional(),
  /** Band of IEEE Std 521, where the files give a wavelength. */
  band: z.string().optional(),
  beamWidthDeg: z.number().optional(),
  fileCount: z.number().int(),
  sweepCount: z.number().int(),
  roundCount: z.number().int(),
  sweepsPerRound: z.strictObject({ least: z.number().int(), most: z.number().int() }),
  /** Null with a single round. */
  medianRoundMinutes: z.number().nullable(),
  firstStart: instant,
  lastEnd: instant,
  /** Holes between successive rounds longer than two and a half median rounds. */
  gaps: z.array(z.strictObject({ from: instant, to: instant, minutes: z.number() })),
  quantities: z.array(z.strictObject({ name: z.string(), sweepCount: z.number().int() })),
  elevationsDeg: z.array(z.number()),
  /** Far edge of the farthest gate. */
  maxRangeKm: z.number(),
  /** Sweeps that came more than once: same site, start and elevation. */
  resent: z.strictObject({ sameFile: z.number().int(), otherFile: z.number().int() }),
  formats: z.array(z.string()),
  files: z.array(z.string()),
});

/** What a look at a part of a file says, and how sure that is. */
function guess<T extends z.ZodType>(value: T) {
  return z.strictObject({ value, standing: z.enum(["found", "guessed"]), reason: z.string() });
}
const textGuess = guess(z.string());

const gaugeFinding = z.strictObject({
  file: z.string(),
  network: textGuess,
  layout: guess(z.enum(["long", "wide", "waterml2"])),
  kind: guess(z.enum(["increments", "counter", "intensity", "tips"])),
  unit: guess(z.enum(["mm", "in", "mm/h", "in/h", "tips"])),
  tipMm: guess(z.number()).optional(),
  columns: guess(
    z.strictObject({
      gauge: z.string().optional(),
      date: z.string().optional(),
      time: z.string().optional(),
      value: z.string().optional(),
      quality: z.string().optional(),
    }),
  ),
  stepMinutes: guess(z.number()).optional(),
  /** Null where the stamps name no zone, or several. */
  zone: guess(z.string().nullable()),
  missing: guess(z.array(z.string())),
  qualityCodes: z.array(z.string()),
  encoding: guess(z.enum(TEXT_ENCODINGS)),
  /** Where lines of introduction stand above the header: its line, from 1. */
  headerLine: z.number().int().optional(),
  decimal: guess(z.enum(["point", "comma"])),
  /** "ask" where nothing tells day and month apart. */
  dates: guess(z.enum(["ymd", "dmy", "mdy", "serial-1900", "ask"])),
  /** Whether stamps are dates without a time of day. */
  dateOnly: z.boolean(),
  idFrom: guess(z.enum(["column", "file", "label"])),
  fileName: z.string().optional(),
  label: z.string().optional(),
  stamp: guess(z.enum(["end", "start"])).optional(),
  /** As if UTC where the stamps name no zone; null where no stamp can be read. */
  firstStamp: instant.nullable(),
  lastStamp: instant.nullable(),
  gaugeIds: z.array(z.string()),
  /** False where only the two ends of the file were read for ids. */
  allGaugeIdsSeen: z.boolean(),
  stationsFile: z.string().optional(),
  withoutStation: z.array(z.string()),
});

const stationFinding = z.strictObject({
  file: z.string(),
  columns: guess(
    z.strictObject({
      id: z.string(),
      name: z.string().optional(),
      x: z.string(),
      y: z.string(),
      elevation: z.string().optional(),
      validFrom: z.string().optional(),
      validTo: z.string().optional(),
      tipMm: z.string().optional(),
      heated: z.string().optional(),
      corrections: z.string().optional(),
    }),
  ),
  encoding: guess(z.enum(TEXT_ENCODINGS)).optional(),
  headerLine: z.number().int().optional(),
  decimal: z.enum(["point", "comma"]),
  /** Guessed: points that figures are wanted for, not gauges. */
  assets: z.boolean(),
  stationCount: z.number().int(),
  /** Null where x and y are metres of a system that nobody named. */
  crs: guess(z.string().nullable()),
  /** Stations that no gauge file has readings of. */
  withoutReadings: z.array(z.string()),
});

const mapFinding = z.strictObject({
  file: z.string(),
  format: z.enum(["GeoJSON", "Shapefile", "GeoPackage"]),
  /** The layer that was looked at, and all that may hold areas. */
  layer: z.string().optional(),
  layers: z.array(z.string()).optional(),
  polygonCount: z.number().int(),
  idField: textGuess.optional(),
  nameField: textGuess.optional(),
  crs: z.string().optional(),
  /** False where nothing says what the coordinates are. */
  crsKnown: z.boolean(),
});

const gridFinding = z.strictObject({
  file: z.string(),
  name: z.string(),
  format: z.string(),
  quantity: z.enum(["rainRateMmPerHour", "depthMm", "reflectivityDbz"]),
  layerCount: z.number().int(),
  nx: z.number().int(),
  ny: z.number().int(),
  /** Cell size and coordinate system, for people. */
  place: z.string(),
  firstStart: instant,
  lastEnd: instant,
  /** Median time between layers; null for a single one. */
  stepMinutes: z.number().nullable(),
  remarks: z.array(z.string()),
});

const terrainFinding = z.strictObject({
  file: z.string(),
  nx: z.number().int(),
  ny: z.number().int(),
  crs: z.string(),
  /** Of the system: metres, or degrees. */
  cellWidth: z.number(),
  /** What speaks for it. */
  reason: z.string(),
});

/** The result of `survey --json`: what lies there, what is wrong with it, what can be made of it. */
export const surveySchema = z.strictObject({
  format: z.literal("rainreckon-survey-1"),
  paths: z.array(z.string()),
  fileCount: z.number().int(),
  radars: z.array(radarFinding),
  gauges: z.array(gaugeFinding),
  stations: z.array(stationFinding),
  catchments: z.array(mapFinding),
  /** Rain or reflectivity that comes on a grid already. */
  grids: z.array(gridFinding),
  /** Heights of the ground: what may stand in the beams. */
  terrain: z.array(terrainFinding),
  otherFiles: z.array(z.strictObject({ kind: z.string(), count: z.number().int() })),
  wrong: z.array(manifestNotice),
  /** Time that radars, or else grids, cover; and the part of it that gauges cover as well, where there are any. */
  window: z
    .strictObject({
      from: instant,
      to: instant,
      basis: z.enum(["radars and gauges", "radars", "grids and gauges", "grids"]),
    })
    .nullable(),
  possible: z.array(z.string()).describe("what can be made of it, one sentence each"),
  next: z.string().describe("the command to type next"),
});

export type Findings = z.output<typeof surveySchema>;
export type GridFinding = z.output<typeof gridFinding>;
export type RadarFinding = z.output<typeof radarFinding>;
export type GaugeFinding = z.output<typeof gaugeFinding>;
export type StationFinding = z.output<typeof stationFinding>;
export type Guessed<T> = {
  readonly value: T;
  readonly standing: "found" | "guessed";
  readonly reason: string;
};
export type TerrainFinding = z.output<typeof terrainFinding>;
export type MapFinding = z.output<typeof mapFinding>;
