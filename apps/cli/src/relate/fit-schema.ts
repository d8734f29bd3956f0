import { RELATION_FITS } from "@rainreckon/verification";
import { z } from "zod";

/** null where it is not known. */
const known = z.number().nullable();

const interval = z
  .strictObject({
    low: known,
    high: known,
    level: z.number().describe("two-sided level of confidence"),
    reason: z.string().optional().describe("why there is none"),
  })
  .describe("type 7 percentiles of a bootstrap");

const error = z.strictObject({
  biasRatio: known.describe("sum of rates by the relation / sum of the gauges', radar/gauge"),
  rootMeanSquareErrorMmPerHour: known,
  relativeErrorPercent: known.describe("the same over the mean gauge rate"),
});

const spread = z.strictObject({ least: known, p10: known, median: known, p90: known, greatest: known });

/** The result of `relate fit --json`. */
export const relationFitSchema = z.strictObject({
  format: z.literal("rainreckon-relation-fit-1"),
  source: z.strictObject({
    kind: z
      .enum(["run", "plan", "pairs"])
      .describe("a run made again, a plan worked out, or a table of pairs"),
    name: z.string(),
    gaugeCount: known.describe("gauges that pairs come from"),
    start: z.string().nullable().describe("UTC"),
    end: z.string().nullable(),
    intervalMinutes: known,
    averagingExponent: known.describe(
      "b of the averaging: the reflectivity of a pair is (mean of Z^(1/b))^b over gates and time; null where the table has pairs already",
    ),
    bFromMeanZ: known.describe(
      "the bias-free b if Z had been averaged plainly: how much the averaging matters",
    ),
    leftOut: z.array(z.strictObject({ reason: z.string(), count: z.number() })),
    remarks: z.array(z.string()),
  }),
  pairs: z.strictObject({
    count: z.number(),
    wetOnBothSides: z.number(),
    wetOnEitherSide: z.number(),
    leastRateMmPerHour: z.number(),
    leastDbz: z.number().describe("reflectivity of that rate by the reference relation"),
    rateMmPerHour: spread.describe("of pairs wet on both sides"),
    dbz: spread,
    correlation: known.describe("of log Z and log R"),
    pivotRateMmPerHour: known.describe("geometric mean of the rates wet on both sides"),
    conditionIndex: known.describe("of the design of the regression; null without limit"),
    drawn: z.string().describe("what the intervals are drawn from"),
  }),
  reference: z.strictObject({ name: z.string(), a: z.number(), b: z.number(), error }),
  fits: z.array(
    z.strictObject({
      name: z.enum(RELATION_FITS),
      title: z.string(),
      a: known.describe("A in Z = A R^b, Z in mm6 m-3, R in mm/h"),
      b: known,
      aInterval: interval,
      bInterval: interval,
      logACorrelation: known.describe("of log A and b over the resamples"),
      pivotDbz: known.describe("reflectivity at the pivot rate: what the pairs hold best"),
      pivotInterval: interval,
      error: error.describe("on pairs wet on either side: in-sample"),
      warnings: z.array(z.string()),
      reason: z.string().optional().describe("why there is no relation"),
    }),
  ),
  probabilityMatching: z
    .array(z.strictObject({ probability: z.number(), dbz: z.number(), rateMmPerHour: z.number() }))
    .describe("quantiles of the wet part that are as seldom exceeded on both sides"),
  published: z.array(z.strictObject({ name: z.string(), a: z.number(), b: z.number(), error })),
  cap: z.strictObject({
    dbz: z.number(),
    shareAbove: known.describe("share of the rain from gates at or above it; of a table, share of pairs"),
  }),
  doubts: z
    .array(z.strictObject({ kind: z.string(), words: z.string() }))
    .describe("why A cannot be told from b"),
  offered: z
    .strictObject({
      name: z.enum(RELATION_FITS),
      a: z.number(),
      b: z.number(),
      why: z.string(),
      planLine: z.string().describe("for each radar of the plan"),
    })
    .nullable(),
});

export type RelationFitResult = z.output<typeof relationFitSchema>;
