import { z } from "zod";

const known = z.number().nullable();

/** `figure.json` of a bundle: what stands behind the figure of one place. */
export const bundleFigureSchema = z.strictObject({
  format: z.literal("rainreckon-bundle-1"),
  version: z.string(),
  node: z.string().describe("major version: with the same one the bytes of a run are the same"),
  place: z.strictObject({
    kind: z.string(),
    id: z.string(),
    name: z.string(),
    latDeg: known,
    lonDeg: known,
    areaKm2: z.number(),
  }),
  run: z.strictObject({
    title: z.string(),
    status: z.string(),
    runDigest: z.string(),
    planDigest: z.string(),
  }),
  headline: z
    .strictObject({
      depthMm: known,
      noAdjustmentMm: known,
      gaugesOnlyMm: known,
      defaultSettingsMm: known.describe("the run made again with every setting at its default"),
      defaultSettingsNoAdjustmentMm: known,
      p10Mm: known,
      p90Mm: known,
      observedFraction: z.number(),
      lowerBound: z.boolean(),
      range3x3: z.strictObject({ leastMm: z.number(), mostMm: z.number(), cellCount: z.number() }).nullable(),
    })
    .describe("depth of the window"),
  changedSettings: z.array(z.strictObject({ path: z.string(), value: z.string(), defaultValue: z.string() })),
  overrides: z.array(z.record(z.string(), z.unknown())),
  filesBehind: z
    .array(z.string())
    .describe("scans that spoke for the place, by their names among the inputs"),
  gaugesBehind: z.array(z.string()).describe("gauges that move the figure most, first"),
  licences: z.array(z.string()),
  commands: z.array(z.string()).describe("run in the folder of the bundle, with this version of rainreckon"),
});

export type BundleFigure = z.output<typeof bundleFigureSchema>;
