import { z } from "zod";

/** null where it is not known. */
const known = z.number().nullable();

const ranking = z.strictObject({
  rows: z
    .array(
      z.strictObject({
        name: z.string(),
        a: z.number().describe("A in Z = A R^b, Z in mm6 m-3, R in mm/h"),
        b: z.number(),
        cap: z.string().describe('"53 dBZ", "100 mm/h" or "none"'),
        biasRatio: known.describe("sum of depths as judged, radar/gauge"),
        errorMm: known.describe("root mean square error of pair depths, mm"),
        errorPercent: known.describe("the same over the mean gauge depth"),
        sumErrorMm: known.describe("root mean square error of the window sums at gauges, mm"),
        moreThanBestMm: known,
        interval: z.strictObject({
          low: known,
          high: known,
          level: z.number(),
          reason: z.string().optional(),
        }),
        toldApart: z.boolean().describe("whether the difference from the best is more than chance"),
      }),
    )
    .describe("the smallest error first"),
  best: z.string(),
  chosen: z.string(),
  choiceErrorMm: known.describe("error at gauges that had no part in the choice"),
  chosenInFolds: z.record(z.string(), z.number()),
});

const rankings = z.strictObject({
  alone: ranking.describe("depths as they are"),
  afterBias: ranking.describe("each gauge's depths times the factor of the other gauges, gauge/radar"),
});

/** The result of `relate rank --json`. */
export const relationRankSchema = z.strictObject({
  format: z.literal("rainreckon-relation-rank-1"),
  source: z.strictObject({
    kind: z.enum(["run", "plan"]),
    name: z.string(),
    start: z.string(),
    end: z.string(),
    intervalMinutes: z.number(),
    gaugeCount: z.number(),
    gaugesNotTrusted: z.number(),
    pairCount: z.number().describe("wet pairs that relations are held against"),
    pairsOfHailOrSnow: z.number().describe("left out there, since no relation for rain can meet them"),
    meanGaugeMm: z.number(),
    remarks: z.array(z.string()),
  }),
  rule: z.string(),
  order: z.enum(["alone", "after-bias"]),
  plan: z.strictObject({ name: z.string(), cap: z.string() }),
  relations: rankings.describe("under the cap of the plan"),
  caps: z.strictObject({
    relation: z.string(),
    pairCount: z.number().describe("wet pairs, those with hail too"),
    atCap: z
      .array(z.strictObject({ cap: z.string(), gatesShare: z.number() }))
      .describe("share of the rain over the gauges from gates at or above each cap, uncapped"),
    ranks: rankings,
  }),
});

export type RelationRankResult = z.output<typeof relationRankSchema>;
