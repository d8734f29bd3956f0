import { z } from "zod";

const verdict = z.enum(["use", "use with care", "leave out", "too little rain to judge"]);
const known = z.number().nullable();
const cause = z
  .strictObject({
    name: z.string(),
    blame: z.enum(["gauge", "network", "radar", "nobody"]),
    words: z.string(),
    minutesLate: z.number().optional().describe("of a clock: how late stamps are, minutes"),
    factor: z.number().optional().describe("of a unit: what values are too large by"),
  })
  .nullable();
const bias = z.strictObject({
  label: z.string(),
  gauges: z.number().int(),
  gaugeMm: known,
  radarMm: known,
  ratio: known.describe("radar over gauge"),
  low: known.describe("ends of an interval of 95 % over gauges"),
  high: known,
});

/** What all checks make of every gauge and radar: `checks.json` of a run, and what `check --json` prints. */
export const checkSchema = z.strictObject({
  format: z.literal("rainreckon-check-1"),
  title: z.string(),
  status: z.enum(["provisional", "final"]),
  window: z.strictObject({ start: z.string(), end: z.string(), zone: z.string() }),
  trust: z.string().describe("one sentence: how far radar and gauges can be trusted together"),
  counts: z.strictObject({
    use: z.number().int(),
    useWithCare: z.number().int(),
    leaveOut: z.number().int(),
    tooLittleRain: z.number().int(),
  }),
  gauges: z
    .array(
      z.strictObject({
        network: z.string(),
        gaugeId: z.string(),
        name: z.string(),
        verdict,
        cause,
        gaugeMm: known.describe("over the time that both sides observed, mm"),
        radarMm: known,
        ratioDb: known.describe("10 log10(radar/gauge)"),
        evidence: z.string(),
        trusted: z.boolean(),
        override: z
          .strictObject({ verdict: z.string(), reason: z.string(), by: z.string(), date: z.string() })
          .nullable(),
        findings: z.array(
          z.strictObject({
            check: z.string(),
            speaksFor: z.string(),
            numbers: z.record(z.string(), known),
            sentence: z.string(),
          }),
        ),
      }),
    )
    .describe("worst first"),
  radars: z.array(
    z.strictObject({
      radarId: z.string(),
      verdict,
      cause,
      sentence: z.string(),
      whole: bias,
      byRange: z.array(bias),
      bySector: z.array(bias),
      overTime: z.array(bias),
      againstNeighbours: z.array(
        z.strictObject({
          radarId: z.string(),
          n: z.number().int(),
          differenceDb: known,
          lowDb: known,
          highDb: known,
        }),
      ),
    }),
  ),
});

export type CheckDocument = z.output<typeof checkSchema>;
export type CheckedGauge = CheckDocument["gauges"][number];
export type CheckedRadar = CheckDocument["radars"][number];
