import { z } from "zod";

/** The result of `export`: what was written, and what has to be said of it. */
export const exportSchema = z.strictObject({
  format: z.literal("rainreckon-export-1"),
  run: z.string().describe("folder of the run"),
  kind: z.enum(["series", "maps", "weights", "pairs", "tables"]),
  files: z.array(z.string()),
  rows: z.number().int().min(0).describe("rows of the table; of maps their number"),
  missing: z.number().int().min(0).describe("values that are not there, because they were not observed"),
  says: z.array(z.string()).describe("what the files hold, in words"),
});

export type ExportReport = z.output<typeof exportSchema>;
