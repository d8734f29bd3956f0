import { type EFFECTS, MARKS, RATE_METHODS, SCREENS } from "@rainreckon/core";
import { z } from "zod";

/** Null is not observed or not known, never 0. */
const known = z.number().nullable();
const instant = z.string().describe("UTC");
const whole = z.number().int().min(0);

const gateSchema = z.strictObject({
  ray: whole.describe("from 0, rays in ascending azimuth"),
  gate: whole.describe("from 0, outward"),
  azimuthDeg: z.number(),
  rangeKm: z.number().describe("slant range of the gate's centre"),
  stored: known.describe("as the file has it"),
  measured: z.enum(["echo", "below detection", "not observed"]),
  measuredDbz: known,
  screenedBy: z.array(z.enum(SCREENS)).describe("why its echo was not taken for rain; the first one counts"),
  filledDbz: known.describe("what neighbours gave in place of what was screened, before corrections"),
  effectsDb: z.strictObject({
    calibration: z.number(),
    blockage: z.number(),
    gas: z.number(),
    attenuation: z.number(),
    profile: z.number(),
  } satisfies Record<(typeof EFFECTS)[number], z.ZodType>),
  marks: z.array(z.enum(MARKS)),
  twoWayLossDb: known,
  blockedFraction: known,
  zdrDb: known.describe("differential reflectivity, as the rate was made from it"),
  rhohv: known,
  kdpDegPerKm: known.describe("one way, from the file or worked up from PHIDP"),
  dbz: known.describe("what became rain: measured or filled, with the effects added"),
  method: z.enum(RATE_METHODS).nullable().describe("what the larger part of the rate was made from"),
  relation: z.string().nullable().describe("A/b of Z = A R^b, Z in mm6 m-3, R in mm/h"),
  capped: z.boolean().describe("whether the cap holds the rate"),
  rateMmPerHour: known.describe("null: the gate does not speak, and is left out of the cell's mean"),
});

const passedOverSchema = z.strictObject({
  file: z.string(),
  elevationDeg: z.number(),
  why: z.string(),
});

const scanSchema = z.strictObject({
  number: z.number().int().min(1),
  source: z.string().describe("id of the radar, or of the gridded rain"),
  kind: z.enum(["sweep", "gridded"]),
  file: z.string().nullable().describe("null where no sweep of the round observed the cell"),
  dataset: z.string().nullable(),
  elevationDeg: known,
  time: instant.describe("the instant that the sweep speaks for; of a gridded depth, its end"),
  azimuthDeg: known.describe("of the cell's centre, from the radar"),
  rangeKm: known.describe("along the ground to the cell's centre"),
  beamHeightAslM: known,
  dropSizeFactor: known.describe(
    "factor on every rate from Z for the size of drops, as ZDR tells it over the run",
  ),
  dropNumberFactor: known.describe("a further factor, for the number of drops, in this sweep"),
  gates: z.array(gateSchema),
  gridValues: z
    .array(z.strictObject({ value: known, rateMmPerHour: known }))
    .describe("of gridded rain: its values in this cell, in the file's own quantity"),
  gridQuantity: z.enum(["rainRateMmPerHour", "depthMm", "reflectivityDbz"]).nullable(),
  passedOver: z.array(passedOverSchema).describe("lower sweeps that did not speak, and why"),
  rateMmPerHour: known.describe("of the cell: the mean over its gates that speak, stored as float32"),
  weight: known.describe("blend weight of the cell in this scan"),
});

const partSchema = z.strictObject({
  stepStart: instant,
  stepEnd: instant,
  start: instant,
  end: instant,
  source: z.string(),
  kind: z.enum(["usual", "bridged", "edge"]),
  scan: z.number().int().min(1),
  nextScan: z.number().int().min(1).describe("the same one at an edge"),
  rateMmPerHour: z.number(),
  nextRateMmPerHour: z.number(),
  hours: z.number().describe("what the rate of the scan counts for"),
  nextHours: z.number(),
  share: z.number().describe("of this source, among those that observed"),
  depthMm: z.number().describe("share x (hours x rate + nextHours x nextRate)"),
  runningMm: z.number(),
});

const stepSchema = z.strictObject({
  start: instant,
  end: instant,
  radarMm: known,
  observedFraction: z.number(),
  gaugeMm: known,
});

const intervalSchema = z.strictObject({
  start: instant,
  end: instant,
  partsMm: z.number().describe("sum of the parts above"),
  radarMm: known.describe("as the program makes it again, float32"),
  storedMm: known.describe("radar_depth of totals.nc"),
  adjustedMm: known,
  storedAdjustedMm: known,
  gaugeMm: known,
});

const sureSchema = z
  .strictObject({ standardErrorMm: z.number(), p10Mm: z.number(), p90Mm: z.number() })
  .nullable()
  .describe("how sure the figure to use is; null where nothing tells");

const endSchema = z.strictObject({
  what: z.string().describe("the figure that the account ends on"),
  radarMm: known,
  storedRadarMm: known,
  partsMm: known.describe("sum of the parts of the window, rounded to float32 by interval and as a whole"),
  spanRadarMm: known.describe("radar depth of the span that is accounted for"),
  adjustedMm: known,
  storedAdjustedMm: known,
  sure: sureSchema,
  exact: z.boolean().describe("every figure made again is the stored one to the last bit"),
});

const adjustmentGaugeSchema = z.strictObject({
  network: z.string(),
  gaugeId: z.string(),
  distanceKm: known,
  gaugeMm: z.number(),
  radarMm: z.number(),
  weight: known.describe(
    "in a mean-field bias: share of the radar's depth at all gauges, the weight of its G/R",
  ),
  mmPerMm: known.describe("by how much the figure moves where this gauge reads 1 mm more"),
  withoutMm: known.describe("the figure, had this gauge not been there"),
});

const adjustmentSchema = z.strictObject({
  applied: z.boolean(),
  reason: z.string().nullable().describe("why there is none"),
  method: z.string().nullable(),
  title: z.string().nullable(),
  factor: known.describe("gauge/radar, where it is one for all places and times"),
  factorHere: known.describe("adjusted over radar depth of the window, here"),
  gaugeCount: whole,
  notes: z.array(z.string()),
  gauges: z.array(adjustmentGaugeSchema).describe("those that move the figure most, first"),
  gaugesNotListed: whole,
});

const gaugeSchema = z.strictObject({
  network: z.string(),
  gaugeId: z.string(),
  name: z.string().nullable(),
  verdict: z.string(),
  cause: z.string(),
  readingMinutes: known.describe("longest step of its readings; null where they are tips"),
  gaugeMm: known.describe("over the time that both observed"),
  radarMm: known.describe("of the cells that stand for the gauge, over the same time"),
  cellCount: whole.describe("how many cells stand for it; the account is of its own one"),
});

const pointSchema = z.strictObject({
  kind: z.enum(["point", "gauge"]),
  name: z.string(),
  latDeg: z.number(),
  lonDeg: z.number(),
  cell: z.strictObject({
    column: whole,
    row: whole,
    centreLatDeg: z.number(),
    centreLonDeg: z.number(),
    sizeM: z.number(),
  }),
  gauge: gaugeSchema.nullable(),
  scans: z.array(scanSchema),
  parts: z.array(partSchema),
  steps: z.array(stepSchema),
  intervals: z.array(intervalSchema).describe("those that lie wholly in the span"),
  end: endSchema,
  adjustment: adjustmentSchema,
});

const areaScanSchema = z.strictObject({
  number: z.number().int().min(1),
  source: z.string(),
  kind: z.enum(["sweep", "gridded"]),
  files: z.array(z.string()),
  elevationsDeg: z.array(z.number()),
  time: instant,
  observedShare: z.number().describe("of the area"),
  screenedShare: z.number().describe("of the area, with rain taken out by a screen"),
  meanRateMmPerHour: known.describe("over the part observed"),
  cappedShare: known.describe("of that rain, from gates at the cap"),
  screenedMmPerHour: z.number().describe("rain that screened echo would have made, over the whole area"),
  correctionsDb: z
    .strictObject({ blockage: known, gas: known, attenuation: known, profile: known })
    .describe("means by rain"),
  filledShare: known.describe("of that rain, from gates that were screened and filled"),
  meanBeamHeightAslM: known,
});

const areaStepSchema = z.strictObject({
  start: instant,
  end: instant,
  radarMm: known,
  storedRadarMm: z.string().nullable().describe("radar_mm of catchments.csv, as written"),
  observedFraction: z.number(),
  adjustedMm: known,
  shares: z.record(z.string(), z.number()).describe("of the observed area and time, by source"),
  runningMm: z.number(),
});

const areaSchema = z.strictObject({
  id: z.string(),
  name: z.string(),
  areaKm2: z.number(),
  cellCount: whole,
  scans: z.array(areaScanSchema),
  steps: z.array(areaStepSchema),
  end: z.strictObject({
    radarMm: known,
    adjustedMm: known,
    observedFraction: z.number(),
    spanRadarMm: z.number().describe("radar depth of the span that is accounted for"),
    depthObservedMm: known.describe("the figure to use, from the part observed"),
    storedDepthObservedMm: z.string().nullable().describe("depth_observed_mm of catchments.csv, as written"),
    sure: sureSchema,
    exact: z.boolean(),
  }),
  adjustment: adjustmentSchema,
});

/** What `explain --json` prints. */
export const explainSchema = z.strictObject({
  format: z.literal("rainreckon-explain-1"),
  run: z.strictObject({
    folder: z.string(),
    title: z.string(),
    status: z.string(),
    version: z.string(),
    runDigest: z.string(),
  }),
  window: z.strictObject({ start: instant, end: instant }),
  span: z.strictObject({ start: instant, end: instant }).describe("what is accounted for, whole steps"),
  remarks: z.array(z.string()),
  points: z.array(pointSchema),
  catchments: z.array(areaSchema),
});

export type Explanation = z.output<typeof explainSchema>;
export type PointAccount = Explanation["points"][number];
export type AreaAccount = Explanation["catchments"][number];
export type ScanAccount = PointAccount["scans"][number];
export type GateAccount = ScanAccount["gates"][number];
export type PartAccount = PointAccount["parts"][number];
export type AdjustmentAccount = PointAccount["adjustment"];
