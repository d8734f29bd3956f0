import type { z } from "zod";
import { budgetSchema } from "./budget/schema.ts";
import { checkSchema } from "./check/schema.ts";
import { planReportSchema } from "./commands/plan.ts";
import { totalSchema } from "./commands/total.ts";
import { compareSchema } from "./compare/compare-runs.ts";
import { eventSchema } from "./event/schema.ts";
import { explainSchema } from "./explain/schema.ts";
import { exportSchema } from "./export/schema.ts";
import { manifestSchema } from "./manifest.ts";
import { relationFitSchema } from "./relate/fit-schema.ts";
import { relationRankSchema } from "./relate/rank-schema.ts";
import { relationTableSchema } from "./relate/relation-table.ts";
import { surveySchema } from "./survey/findings.ts";

/** The schema of each command's --json, and of the manifest that total leaves; --schema prints them as JSON Schema. */
export const schemas = {
  survey: surveySchema,
  plan: planReportSchema,
  total: totalSchema,
  event: eventSchema,
  check: checkSchema,
  explain: explainSchema,
  export: exportSchema,
  "relate table": relationTableSchema,
  "relate fit": relationFitSchema,
  "relate rank": relationRankSchema,
  budget: budgetSchema,
  compare: compareSchema,
  manifest: manifestSchema,
} as const satisfies Record<string, z.ZodType>;
