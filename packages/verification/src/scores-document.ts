import type { ScoreInterval } from "@rainreckon/core";
import { z } from "zod";
import type { BootstrapSettings } from "./bootstrap.ts";
import { SCORE_DEFINITIONS } from "./definitions.ts";
import type { ContingencyScore, ScoreGroup, ScoreTable } from "./score-table.ts";

/** A number, or null with the reason beside it. */
const figure = z.number().nullable();
const count = z.number().int().min(0);

const interval = z
  .strictObject({
    low: figure,
    high: figure,
    reason: z.string().min(1).optional().describe("why there is no interval"),
  })
  .refine((limits) => (limits.low === null) === (limits.reason !== undefined), {
    error: "an interval has limits or a reason, not both",
  });

const score = z
  .strictObject({
    name: z.string().min(1),
    value: figure,
    reason: z.string().min(1).optional().describe("why the value is null"),
    n: count.describe("pairs it was worked out on"),
    dropped: count.describe("used pairs that its rule dropped"),
    timeBlocks: interval.optional().describe("bootstrap over blocks of time, all gauges together"),
    gauges: interval.optional().describe("bootstrap over gauges, all times together"),
    wilson: interval.optional().describe("Wilson interval of a share of counts, pairs as independent"),
    standardError: figure.optional().describe("closed form, pairs as independent"),
  })
  .refine((entry) => (entry.value === null) === (entry.reason !== undefined), {
    error: "a score has a value or a reason, not both",
  });

const group = {
  noTimeBlocks: z.string().min(1).optional().describe("why no score of the group has timeBlocks"),
  noGauges: z.string().min(1).optional().describe("why no score of the group has gauges"),
  pairs: count,
  gauges: count,
  intervals: count,
  continuous: z.array(score),
  thresholds: z.array(
    z.strictObject({
      thresholdMm: z.number().positive(),
      counts: z.strictObject({ hits: count, falseAlarms: count, misses: count, correctNegatives: count }),
      scores: z.array(score),
    }),
  ),
};

const table = z.strictObject({
  pairCount: count,
  usedCount: count,
  unused: z.array(z.strictObject({ reason: z.string(), count })),
  whole: z.strictObject(group),
  byRange: z.array(
    z.strictObject({ fromKm: z.number(), toKm: figure.describe("null: without end"), ...group }),
  ),
  byGauge: z.array(z.strictObject({ network: z.string(), gaugeId: z.string(), ...group })),
  byInterval: z.array(
    z.strictObject({ startEpochMs: z.number().int(), endEpochMs: z.number().int(), ...group }),
  ),
});

/** The shape of `scores.json`. Units are UTC epoch milliseconds, mm per interval, km. */
export const scoresSchema = z.strictObject({
  format: z.literal("rainreckon-scores-1"),
  definitions: z
    .record(
      z.string(),
      z.strictObject({
        title: z.string(),
        unit: z.string(),
        best: z.union([z.number(), z.literal("Infinity")]).nullable(),
        rule: z.enum(["either", "both", "all"]),
        definition: z.string(),
        source: z.string().optional(),
      }),
    )
    .describe("what each score means, by its name"),
  settings: z.strictObject({
    pairIntervalMinutes: z.number().positive(),
    thresholdMm: z.number().positive().describe("depth from which a pair counts as wet"),
    blockMinutes: z.number().positive(),
    samples: count,
    seed: count,
    level: z.number().gt(0).lt(1).describe("level of confidence of every interval"),
  }),
  before: table.describe("radar as it is, against the gauges"),
  after: z
    .strictObject({
      basis: z.literal("cross-validated"),
      table: table.describe("each gauge against the radar adjusted by the other gauges only"),
    })
    .nullable(),
  methodChoice: z
    .strictObject({
      rule: z.string().min(1),
      clusterRule: z.string().min(1).describe("which gauges make a cluster"),
      chosen: z.string().min(1),
      outer: z
        .strictObject({ errorMm: figure, meanErrorMm: figure, clusterErrorMm: figure, gaugeCount: count })
        .describe("at gauges that had no part in the choice: the error to quote"),
      candidates: z.array(
        z.strictObject({
          name: z.string().min(1),
          title: z.string().min(1),
          errorMm: figure.describe("root mean square error of window depths at held-out gauges"),
          meanErrorMm: figure.describe("mean error, adjusted minus gauge"),
          clusterErrorMm: figure.describe(
            "root mean square error at gauges held out with their whole cluster",
          ),
          gaugeCount: count,
          chosenInFolds: count.describe("how often it was picked without some of the gauges"),
          notes: z.array(z.string()).describe("where a simpler way stood in"),
        }),
      ),
    })
    .optional()
    .describe("how the method of adjustment was picked; absent where the plan names it"),
  afterReason: z.string().min(1).optional().describe("why there is no score after adjustment"),
});

export type ScoresDocument = z.output<typeof scoresSchema>;

export interface ScoresDocumentInput {
  readonly pairIntervalMs: number;
  readonly thresholdMm: number;
  readonly bootstrap: BootstrapSettings & { readonly blockMinutes: number };
  readonly before: ScoreTable;
  /** Scores of cross-validated pairs, or why there are none. Never those of a gauge that shaped what it judges. */
  readonly after: ScoreTable | { readonly reason: string };
  /** How a method was picked among candidates, where it was; an error that is not known is NaN. */
  readonly methodChoice?: MethodChoiceTable;
}

/** Errors of window depths at held-out gauges, mm: root mean square and mean one by one, root mean square by clusters. */
export interface ChoiceErrors {
  readonly errorMm: number;
  readonly meanErrorMm: number;
  readonly clusterErrorMm: number;
  readonly gaugeCount: number;
}

/** Candidates with their errors at gauges held out in turn, mm. */
export interface MethodChoiceTable {
  readonly rule: string;
  readonly clusterRule: string;
  readonly chosen: string;
  readonly outer: ChoiceErrors;
  readonly candidates: readonly (ChoiceErrors & {
    readonly name: string;
    readonly title: string;
    readonly chosenInFolds: number;
    readonly notes: readonly string[];
  })[];
}

/**
 * The contents of `scores.json`, ready to be written: NaN has become null with its reason.
 *
 * An odds ratio without bound is null with the reason "unbounded".
 */
export function scoresDocument(input: ScoresDocumentInput): ScoresDocument {
  const { before, after, bootstrap } = input;
  const absent = "reason" in after;
  return {
    format: "rainreckon-scores-1",
    definitions: Object.fromEntries(
      Object.entries(SCORE_DEFINITIONS).map(([name, definition]) => [
        name,
        {
          ...definition,
          best: definition.best === Number.POSITIVE_INFINITY ? "Infinity" : finite(definition.best),
        },
      ]),
    ),
    settings: {
      pairIntervalMinutes: input.pairIntervalMs / 60_000,
      thresholdMm: input.thresholdMm,
      blockMinutes: bootstrap.blockMinutes,
      samples: bootstrap.samples,
      seed: bootstrap.seed,
      level: bootstrap.level,
    },
    before: plainTable(before),
    after: absent ? null : { basis: "cross-validated", table: plainTable(after) },
    ...(input.methodChoice === undefined ? {} : { methodChoice: plainChoice(input.methodChoice) }),
    ...(absent ? { afterReason: after.reason } : {}),
  };
}

function plainChoice({
  candidates,
  outer,
  ...words
}: MethodChoiceTable): NonNullable<ScoresDocument["methodChoice"]> {
  const plainErrors = <T extends ChoiceErrors>(errors: T) => ({
    ...errors,
    errorMm: finite(errors.errorMm),
    meanErrorMm: finite(errors.meanErrorMm),
    clusterErrorMm: finite(errors.clusterErrorMm),
  });
  return {
    ...words,
    outer: plainErrors(outer),
    candidates: candidates.map((candidate) => ({ ...plainErrors(candidate), notes: [...candidate.notes] })),
  };
}

type PlainTable = ScoresDocument["before"];
type PlainGroup = PlainTable["whole"];
type PlainScore = PlainGroup["continuous"][number];
type PlainInterval = z.output<typeof interval>;

function plainTable(scores: ScoreTable): PlainTable {
  return {
    pairCount: scores.pairCount,
    usedCount: scores.usedCount,
    unused: scores.unused.map(({ reason, count: times }) => ({ reason, count: times })),
    whole: plainGroup(scores.whole),
    byRange: scores.byRange.map((band) => ({
      fromKm: band.fromKm,
      toKm: finite(band.toKm),
      ...plainGroup(band),
    })),
    byGauge: scores.byGauge.map((gauge) => ({
      network: gauge.network,
      gaugeId: gauge.gaugeId,
      ...plainGroup(gauge),
    })),
    byInterval: scores.byInterval.map((span) => ({
      startEpochMs: span.startEpochMs,
      endEpochMs: span.endEpochMs,
      ...plainGroup(span),
    })),
  };
}

function plainGroup(scores: ScoreGroup): PlainGroup {
  const all = [...scores.continuous, ...scores.thresholds.flatMap((at) => at.scores)];
  const noTimeBlocks = sharedReason(all, "timeBlocks");
  const noGauges = sharedReason(all, "gauges");
  const plain = (entry: ContingencyScore): PlainScore => ({
    ...plainValue(entry),
    ...(noTimeBlocks === undefined ? { timeBlocks: plainInterval(entry.intervals?.timeBlocks) } : {}),
    ...(noGauges === undefined ? { gauges: plainInterval(entry.intervals?.gauges) } : {}),
  });
  return {
    ...(noTimeBlocks === undefined ? {} : { noTimeBlocks }),
    ...(noGauges === undefined ? {} : { noGauges }),
    pairs: scores.pairs,
    gauges: scores.gauges,
    intervals: scores.intervals,
    continuous: scores.continuous.map(plain),
    thresholds: scores.thresholds.map((at) => ({
      thresholdMm: at.thresholdMm,
      counts: { ...at.counts },
      scores: at.scores.map(plain),
    })),
  };
}

/** The reason why none of the scores has an interval, where it is the same for all: said once, not sixty times. */
function sharedReason(
  scores: readonly ContingencyScore[],
  kind: "timeBlocks" | "gauges",
): string | undefined {
  const reason = scores[0]?.intervals?.[kind].reason;
  return scores.every((entry) => entry.intervals?.[kind].reason === reason) ? reason : undefined;
}

function plainValue(entry: ContingencyScore): PlainScore {
  const reason = entry.reason ?? (Number.isFinite(entry.value) ? undefined : "unbounded");
  return {
    name: entry.name,
    value: finite(entry.value),
    ...(reason === undefined ? {} : { reason }),
    n: entry.n,
    dropped: entry.dropped,
    ...(entry.wilson === undefined ? {} : { wilson: plainInterval(entry.wilson) }),
    ...(entry.standardError === undefined ? {} : { standardError: finite(entry.standardError) }),
  };
}

function plainInterval(limits: ScoreInterval | undefined): PlainInterval {
  if (limits === undefined) return { low: null, high: null, reason: "not worked out" };
  if (Number.isFinite(limits.low) && Number.isFinite(limits.high)) {
    return { low: limits.low, high: limits.high };
  }
  return { low: null, high: null, reason: limits.reason ?? "a limit is unbounded" };
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
