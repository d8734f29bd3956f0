import { z } from "zod";

const sha256 = z.string().regex(/^[0-9a-f]{64}$/);

/** What became of one input. */
export const manifestInput = z.strictObject({
  /** Relative to the plan's folder, with forward slashes. */
  path: z.string(),
  kind: z.string(),
  sha256,
  bytes: z.number().int().min(0),
  use: z.enum(["used", "left out", "duplicate"]),
  reason: z.string().optional(),
});

/** One thing said of the run: what, where, what to do; `count` is how often. */
export const manifestNotice = z.strictObject({
  kind: z.string(),
  what: z.string(),
  where: z.string(),
  fix: z.string(),
  count: z.number().int().min(1),
});

/** `manifest.json` of a run: what went in, what came out, under which plan, and what has to be said of it. */
export const manifestSchema = z.strictObject({
  format: z.literal("rainreckon-manifest-1"),
  version: z.string(),
  status: z.enum(["provisional", "final"]),
  title: z.string(),
  runDigest: sha256,
  /** The plan with every default filled in. */
  plan: z.record(z.string(), z.unknown()),
  planDigest: sha256,
  inputs: z.array(manifestInput),
  outputs: z.array(z.strictObject({ file: z.string(), sha256, bytes: z.number().int().min(0) })),
  counts: z.record(z.string(), z.number()),
  notices: z.array(manifestNotice),
  headline: z.record(z.string(), z.unknown()),
  /** What was done to the echo before it became rain; null where nothing was. */
  echo: z
    .strictObject({
      screens: z.array(
        z.strictObject({
          screen: z.string(),
          gates: z.number().int(),
          districtMm: z.number(),
          worstCellMm: z.number(),
        }),
      ),
      corrections: z.array(
        z.strictObject({ correction: z.string(), meanDb: z.number(), largestDb: z.number() }),
      ),
      gates: z.record(z.string(), z.number().int()),
      /** What the vertical profile added, by range. */
      profile: z.array(
        z.strictObject({
          fromKm: z.number(),
          toKm: z.number(),
          wetGates: z.number().int(),
          meanDb: z.number(),
          lostGates: z.number().int(),
        }),
      ),
      learned: z.record(z.string(), z.array(z.string())),
      /** Proposed, never applied. */
      calibration: z.array(
        z.strictObject({
          radar: z.string(),
          errorDb: z.number().nullable(),
          lowDb: z.number().nullable(),
          highDb: z.number().nullable(),
          proposedOffsetDb: z.number().nullable(),
          reason: z.string(),
        }),
      ),
    })
    .nullable(),
});

export type Manifest = z.output<typeof manifestSchema>;
export type ManifestInput = z.output<typeof manifestInput>;
export type ManifestNotice = z.output<typeof manifestNotice>;
