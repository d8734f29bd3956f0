import { z } from "zod";

/** Null is not observed, not known or not asked for, never 0. */
const known = z.number().nullable();
const instant = z.string().describe("UTC");
const whole = z.number().int().min(0);
const share = z.number().min(0).max(1);

const seriesName = z.enum(["AMS", "PDS", "unknown"]);

/** A return period as people may print it, and the numbers behind it. */
const periodSchema = z.strictObject({
  text: z
    .string()
    .describe('two significant figures: "12", "<2", ">100"; "≥" where the depth is a lower bound'),
  years: known.describe("not rounded; the end of the table where the depth lies beyond it"),
  is: z.enum(["below", "at", "above"]).nullable(),
  lowText: z.string().nullable().describe("of the depth that is exceeded 9 times in 10 (p10)"),
  highText: z.string().nullable().describe("of the depth that is exceeded once in 10 (p90)"),
  tableLowText: z.string().nullable().describe("by the upper end of the table's own interval"),
  tableHighText: z.string().nullable().describe("by the lower end of it"),
  arealReduction: known.describe("factor on the table's point depths"),
  reason: z.string().nullable().describe("why there is none"),
});

/** The largest depth of a duration: never without its duration and its area. */
const peakSchema = z.strictObject({
  durationMinutes: z.number().positive(),
  areaKm2: z.number().positive(),
  start: instant.nullable(),
  end: instant.nullable(),
  depthMm: known,
  radarMm: known.describe("by the radar alone, in the same time"),
  p10Mm: known,
  p90Mm: known,
  meanMmPerHour: known,
  observedFraction: share,
  lowerBound: z.boolean().describe("seen in part, or at the cap: the true depth is at least this"),
  atCap: z.boolean(),
  fixedToSlidingRatio: known.describe("mean over many years (Weiss 1964); never applied to an event"),
  reason: z.string().nullable().describe("why there is no depth"),
  period: periodSchema.nullable().describe("null where no table was given"),
});

const antecedentSchema = z.strictObject({
  hours: z.number(),
  depthMm: known,
  observedFraction: share,
  lowerBound: z.boolean(),
});

const rainEventSchema = z.strictObject({
  number: z.number().int().min(1),
  start: instant,
  end: instant,
  depthMm: z.number(),
  p10Mm: known,
  p90Mm: known,
  observedFraction: share,
  lowerBound: z.boolean(),
  atCap: z.boolean(),
  unseenSteps: whole.describe("within it, neither wet nor dry"),
  mayBeginEarlier: z.boolean(),
  mayEndLater: z.boolean(),
  antecedent: z.array(antecedentSchema),
  peaks: z.array(peakSchema).describe("over windows that share time with the event"),
});

const windowSchema = z.strictObject({
  depthMm: known,
  radarMm: known.describe("without adjustment"),
  adjustedMm: known,
  gaugesOnlyMm: known.describe("by the gauges alone"),
  p10Mm: known,
  p90Mm: known,
  observedFraction: share,
  lowerBound: z.boolean(),
  atCap: z.boolean(),
  volumeM3: known.describe("of catchments"),
  range3x3: z
    .strictObject({ leastMm: z.number(), mostMm: z.number(), cellCount: whole })
    .nullable()
    .describe("of the cell and the eight about it"),
});

const placeSchema = z.strictObject({
  kind: z.enum(["catchment", "asset", "gauge", "point"]),
  id: z.string(),
  name: z.string(),
  latDeg: known,
  lonDeg: known,
  areaKm2: z.number().positive().describe("of the catchment, or of the grid cell that stands for a point"),
  figure: z.enum(["adjusted", "radar"]).describe("what depths are, where nothing else is said"),
  from: z.enum(["tables", "made again", "grid"]).describe("where its steps come from"),
  exact: z
    .boolean()
    .nullable()
    .describe("whether what was made again is what totals.nc holds, to the last bit; null where nothing was"),
  stepMinutes: z.number().positive(),
  window: windowSchema,
  events: z.array(rainEventSchema),
  dropped: z.strictObject({ count: whole, depthMm: z.number() }).describe("events below the least depth"),
  maxima: z.array(peakSchema).describe("over the whole window, one for each duration"),
  gauge: z
    .strictObject({
      verdict: z.string(),
      depthMm: known,
      observedFraction: share,
      maxima: z.array(peakSchema).describe("of the gauge's own readings, a point: its area counts as 0"),
    })
    .nullable(),
  notes: z.array(z.string()),
});

const areaDurationSchema = z.strictObject({
  durationMinutes: z.number().positive(),
  areaKm2: z.number().positive(),
  depthMm: z.number(),
  start: instant,
  end: instant,
  centreLatDeg: z.number(),
  centreLonDeg: z.number(),
});

/** What `event --json` prints. */
export const eventSchema = z.strictObject({
  format: z.literal("rainreckon-event-1"),
  run: z.strictObject({
    folder: z.string(),
    title: z.string(),
    status: z.string(),
    version: z.string(),
    runDigest: z.string(),
  }),
  window: z.strictObject({ start: instant, end: instant, zone: z.string() }),
  rule: z.strictObject({
    dryMinutes: z.number().positive(),
    minDepthMm: z.number().min(0),
    wetMmPerHour: z.number().min(0),
    whose: z.string().describe("whose rule it is"),
    words: z.string(),
  }),
  durations: z.strictObject({
    minutes: z.array(z.number().positive()),
    clockAligned: z.boolean(),
    words: z.string(),
  }),
  frequency: z
    .strictObject({
      file: z.string(),
      sha256: z.string(),
      series: seriesName,
      shownAs: seriesName,
      kind: z.enum(["point", "areal", "unknown"]),
      areaKm2: known,
      source: z.string(),
      edition: z.string(),
      leastMinutes: z.number(),
      mostMinutes: z.number(),
      leastYears: z.number(),
      mostYears: z.number(),
      arealReduction: z.strictObject({ file: z.string(), sha256: z.string(), source: z.string() }).nullable(),
      words: z.array(z.string()),
    })
    .nullable(),
  places: z.array(placeSchema),
  exceedances: z
    .strictObject({
      placeCount: whole,
      rows: z.array(
        z.strictObject({
          periodYears: z.number(),
          expectedPerYear: z.number().describe("places that meet it in a year, at any one duration"),
          seen: whole.describe("places that met it here, at any of the durations"),
        }),
      ),
      words: z.string(),
    })
    .nullable(),
  areaDuration: z
    .strictObject({
      figure: z.enum(["adjusted", "radar"]),
      intervalMinutes: z.number(),
      rows: z.array(areaDurationSchema),
      centre: z
        .strictObject({
          deepestMm: z.number(),
          cellKm2: z.number(),
          latDeg: z.number(),
          lonDeg: z.number(),
          rainMiddleLatDeg: z.number(),
          rainMiddleLonDeg: z.number(),
        })
        .nullable(),
      words: z.string(),
    })
    .nullable(),
  cautions: z.array(z.string()),
});

export type EventReport = z.output<typeof eventSchema>;
export type PlaceReport = EventReport["places"][number];
export type EventAccount = PlaceReport["events"][number];
export type Peak = PlaceReport["maxima"][number];
export type PeriodTold = NonNullable<Peak["period"]>;
