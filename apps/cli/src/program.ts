import { Command } from "commander";
import { EXIT_WORDS, NothingLeft, speakPlainly } from "./command.ts";
import { registerBudget } from "./commands/budget.ts";
import { registerCheck } from "./commands/check.ts";
import { registerCompare } from "./commands/compare.ts";
import { registerEvent } from "./commands/event.ts";
import { registerExplain } from "./commands/explain.ts";
import { registerExport } from "./commands/export.ts";
import { registerPlan } from "./commands/plan.ts";
import { registerRelate } from "./commands/relate.ts";
import { registerSurvey } from "./commands/survey.ts";
import { registerTotal } from "./commands/total.ts";
import { EXIT, errorText, exitStatusOf } from "./exit.ts";
import { flags } from "./options.ts";
import { version } from "./version.ts";

/** The whole command line, without having read any argument. */
export function buildProgram(): Command {
  const program = new Command("rainreckon")
    .description("Rain totals from weather-radar scans, checked against rain gauges.")
    .version(version(), "--version", "print the version and stop")
    .addOption(flags.json())
    .addOption(flags.quiet())
    .addOption(flags.debug())
    .addOption(flags.noColour())
    .configureHelp({ showGlobalOptions: true })
    .helpOption("-h, --help", "print this help and stop")
    .addHelpText("after", AFTER_HELP);
  speakPlainly(program);
  registerSurvey(program);
  registerPlan(program);
  registerTotal(program);
  registerEvent(program);
  registerCheck(program);
  registerExplain(program);
  registerExport(program);
  registerRelate(program);
  registerBudget(program);
  registerCompare(program);
  return program;
}

const AFTER_HELP = `
Examples:
  rainreckon survey data/
  rainreckon plan data/ -o plan.yaml
  rainreckon relate table --dbz 20..55
  rainreckon budget --band S,C,X

Units: mm, mm/h, dBZ, km, degrees; instants are UTC unless a zone stands beside them.
${EXIT_WORDS}`;

/**
 * Runs one command line from its arguments to its exit status. Errors are told here and nowhere else.
 *
 * @param args - without the names of node and of the program
 */
export async function runProgram(args: readonly string[]): Promise<number> {
  try {
    await buildProgram().parseAsync(args, { from: "user" });
    return Number(process.exitCode ?? EXIT.done);
  } catch (error) {
    if (error instanceof NothingLeft) return EXIT.done;
    process.stderr.write(`${errorText(error, args.includes("--debug"))}\n`);
    return exitStatusOf(error);
  }
}
