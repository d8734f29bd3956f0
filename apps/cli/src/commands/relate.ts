import type { CapSetting } from "@rainreckon/core";
import type { RelationFitName } from "@rainreckon/verification";
import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { EXIT } from "../exit.ts";
import { flags } from "../options.ts";
import { relationFitSchema } from "../relate/fit-schema.ts";
import { relationRankSchema } from "../relate/rank-schema.ts";
import {
  relationsByName,
  relationTable,
  relationTableSchema,
  relationTableText,
} from "../relate/relation-table.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { terminalOf } from "../ui/terminal.ts";

interface TableFlags {
  readonly dbz: readonly number[];
  readonly relation?: readonly string[];
  readonly cap: CapSetting;
}

/** `relate`: relations between reflectivity and rain rate, side by side, fitted, and ranked. */
export function registerRelate(program: Command): void {
  const relate = addCommand(program, "relate", "Relations between reflectivity and rain rate.", [
    "rainreckon relate table",
    "rainreckon relate fit run",
    "rainreckon relate rank run",
  ]);
  registerTable(relate);
  registerFit(relate);
  registerRank(relate);
}

function registerTable(relate: Command): void {
  const command = addCommand(
    relate,
    "table",
    "Relations side by side: rain rate in mm/h for reflectivities in dBZ, sorted by the exponent b.",
    [
      "rainreckon relate table",
      "rainreckon relate table --dbz 20..50..2.5 --cap 100mm/h",
      "rainreckon relate table --relation marshall-1955-200/1.6 300,1.4",
    ],
  )
    .addOption(flags.dbz())
    .addOption(flags.relation())
    .addOption(flags.cap());
  addSchemaFlag(command, relationTableSchema);
  command.action(() => {
    const { dbz, relation, cap } = command.opts<TableFlags>();
    const terminal = terminalOf(command);
    const table = relationTable(relationsByName(relation), dbz, cap);
    if (terminal.json) printJson(terminal, relationTableSchema, table);
    else terminal.result(relationTableText(table));
  });
}

interface FitFlags {
  readonly pairs?: string;
  readonly plan?: string;
  readonly interval?: number;
  readonly leastRate: number;
  readonly relation?: string;
  readonly method?: RelationFitName;
  readonly chart?: string;
  readonly strict?: boolean;
}

const FIT_WORDS = `
Rows of the table:
  log R on dBZ          least squares of the rate: where rain is to be told from reflectivity
  dBZ on log R          least squares of the reflectivity
  reduced major axis    ratio of the spreads, between the two
  bias-free             keeps the sum of rain, with the smallest root mean square error in mm/h
  bias-free, b fixed    keeps the sum of rain with the b of --relation: only A is fitted
  probability matching  what is as seldom exceeded on both sides (Calheiros and Zawadzki 1987); blind to whether the
                        two sides have anything to do with each other
Bias-free is offered, or with b fixed where the pairs cannot tell A from b. A run is made again from the files of its
manifest, and takes as long as it did on one processor; only gauges that it trusts count.`;

function registerFit(relate: Command): void {
  const command = addCommand(
    relate,
    "fit [target]",
    "Z = A R^b fitted in six ways to pairs of corrected reflectivity and gauge rate: of a finished run, of a plan, or from a table. With intervals, what the pairs cannot tell, a plot, and the line for the plan.",
    [
      "rainreckon relate fit run",
      "rainreckon relate fit run --interval 30 --least-rate 0.5 --chart fit.svg",
      "rainreckon relate fit --pairs pairs.csv --relation 300,1.4 --json",
    ],
  );
  for (const option of [
    flags.pairsFile(),
    flags.planOfRun(),
    flags.pairMinutes(),
    flags.leastRate(),
    flags.fitReference(),
    flags.fitMethod(),
    flags.chart(),
    flags.strict(),
  ])
    command.addOption(option);
  command.addHelpText("after", FIT_WORDS);
  addSchemaFlag(command, relationFitSchema);
  command.action(async (target: string | undefined, options: FitFlags) => {
    const terminal = terminalOf(command);
    const log = leftOutLog(terminal);
    const { fitOf } = await import("../relate/fit.ts");
    const fitted = await fitOf(
      {
        target,
        pairsFile: options.pairs,
        plan: options.plan,
        intervalMinutes: options.interval,
        leastRateMmPerHour: options.leastRate,
        reference: options.relation,
        method: options.method,
      },
      log,
      terminal,
    );
    if (options.chart !== undefined) {
      const { writeFitChart } = await import("../relate/write-fit-chart.ts");
      await writeFitChart(options.chart, fitted);
      terminal.note(`chart: ${options.chart}`);
    }
    if (terminal.json) printJson(terminal, relationFitSchema, fitted.result);
    else {
      const { fitText } = await import("../relate/fit-text.ts");
      terminal.result(fitText(fitted, terminal));
    }
    log.finish();
    if (options.strict === true && log.count > 0) process.exitCode = EXIT.failed;
  });
}

interface RankFlags {
  readonly plan?: string;
  readonly interval?: number;
  readonly relation?: readonly string[];
  readonly caps: readonly (CapSetting | "none")[];
  readonly order: "alone" | "after-bias";
  readonly strict?: boolean;
}

const RANK_WORDS = `
Columns:
  R/G             sum of radar depths over sum of gauge depths, as they are
  alone           root mean square error of pair depths, mm, and per cent of the mean gauge depth
  after bias      the same once each gauge's depths are multiplied by gauge/radar of the other gauges
  more than best  interval of the difference from the best of the column that decides (--order)
All rain is made from corrected reflectivity by the relation ranked; what a run makes from phase, or by relations for
showers and widespread rain, has no part in it. Gauges are those that the run trusts. Whether a difference is noise is
told by drawing gauges with all their pairs, the same for both (Hamill 1999).`;

function registerRank(relate: Command): void {
  const command = addCommand(
    relate,
    "rank <target>",
    "Published relations and hail caps held against the trusted gauges of a finished run or a plan: with their depths as they are and after each one's own bias, gauge by gauge left out in turn, and which differences are noise.",
    [
      "rainreckon relate rank run",
      "rainreckon relate rank run --relation 243,1.46 --order alone",
      "rainreckon relate rank plan.yaml --caps 100mm/h,none --json",
    ],
  );
  for (const option of [
    flags.planOfRun(),
    flags.pairMinutes(),
    flags.ownRelations(),
    flags.caps(),
    flags.rankOrder(),
    flags.strict(),
  ])
    command.addOption(option);
  command.addHelpText("after", RANK_WORDS);
  addSchemaFlag(command, relationRankSchema);
  command.action(async (target: string, options: RankFlags) => {
    const terminal = terminalOf(command);
    const log = leftOutLog(terminal);
    const { rankOf } = await import("../relate/rank.ts");
    const ranked = await rankOf(
      {
        target,
        plan: options.plan,
        intervalMinutes: options.interval,
        order: options.order,
        relations: options.relation,
        caps: options.caps,
      },
      log,
      terminal,
    );
    if (terminal.json) printJson(terminal, relationRankSchema, ranked);
    else {
      const { rankText } = await import("../relate/rank-text.ts");
      terminal.result(rankText(ranked, terminal));
    }
    log.finish();
    if (options.strict === true && log.count > 0) process.exitCode = EXIT.failed;
  });
}
