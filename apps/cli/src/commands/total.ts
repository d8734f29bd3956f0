import path from "node:path";
import type { Command } from "commander";
import { z } from "zod";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { EXIT } from "../exit.ts";
import { manifestSchema } from "../manifest.ts";
import { flags } from "../options.ts";
import type { TotalOutcome } from "../total/run-total.ts";
import { countText } from "../ui/numbers.ts";
import { terminalOf } from "../ui/terminal.ts";

/** What `total --json` prints. */
export const totalSchema = z.strictObject({
  outcome: z.enum(["done", "already there", "dry run"]),
  folder: z.string(),
  runDigest: z.string(),
  leftOutCount: z.number().int().min(0).describe("how many things were left out, doubted or assumed"),
  headline: manifestSchema.shape.headline.optional(),
  counts: manifestSchema.shape.counts.optional(),
  estimate: z.record(z.string(), z.number()).optional(),
});

interface TotalFlags {
  readonly out: string;
  readonly dryRun?: boolean;
  readonly workers: number;
  readonly force?: boolean;
  readonly strict?: boolean;
  readonly rate?: boolean;
  readonly members: number;
  readonly despiteSpace?: boolean;
}

/** `total PLAN --out DIR`: the main job. */
export function registerTotal(program: Command): void {
  const command = addCommand(
    program,
    "total <plan>",
    "Rain totals from scans, with gauges beside them: maps, depths by catchment, scores and a report in one folder.",
    [
      "rainreckon total plan.yaml --out run",
      "rainreckon total plan.yaml --out run --dry-run",
      "rainreckon total plan.yaml --out run --workers 2 --strict",
      "rainreckon total plan.yaml --out run --members 20",
      "rainreckon total plan.yaml --out map --rate",
    ],
  )
    .addOption(flags.runFolder())
    .addOption(flags.dryRun())
    .addOption(flags.workers())
    .addOption(flags.moveAside())
    .addOption(flags.strict())
    .addOption(flags.members())
    .addOption(flags.despiteSpace())
    .addOption(flags.rate());
  addSchemaFlag(command, totalSchema);
  command.action(async (plan: string, options: TotalFlags) => {
    const terminal = terminalOf(command);
    if (options.rate === true) {
      const { makeRateMap } = await import("../rate/rate-map.ts");
      const noticeCount = await makeRateMap(plan, options.out, terminal);
      if (options.strict === true && noticeCount > 0) process.exitCode = EXIT.failed;
      return;
    }
    // Loaded here, so that no other command waits for charts, projections and the rest.
    const { runTotal } = await import("../total/run-total.ts");
    const { totalText } = await import("../total/total-text.ts");
    const { outcome, noticeCount } = await runTotal(
      plan,
      {
        out: options.out,
        workers: options.workers,
        force: options.force === true,
        dryRun: options.dryRun === true,
        members: options.members,
        despiteSpace: options.despiteSpace === true,
      },
      terminal,
    );
    if (terminal.json) printJson(terminal, totalSchema, jsonOf(outcome, options.out, noticeCount));
    else
      terminal.result(
        totalText(outcome, path.relative(process.cwd(), path.resolve(options.out)) || ".", terminal),
      );
    if (noticeCount > 0) {
      const what = noticeCount === 1 ? "1 thing was" : `${countText(noticeCount)} things were`;
      const where = outcome.kind === "dry run" ? "" : "; all of it stands in manifest.json";
      terminal.note(`${what} left out, doubted or assumed${where}`);
    }
    if (options.strict === true && noticeCount > 0) process.exitCode = EXIT.failed;
  });
}

function jsonOf(outcome: TotalOutcome, folder: string, leftOutCount: number): z.output<typeof totalSchema> {
  const common = { outcome: outcome.kind, folder, runDigest: outcome.run.runDigest, leftOutCount };
  if (outcome.kind === "done") {
    const { headline, counts } = outcome.manifest;
    return { ...common, headline, counts };
  }
  return outcome.kind === "dry run" ? { ...common, estimate: { ...outcome.estimate } } : common;
}
