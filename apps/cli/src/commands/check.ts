import type { Command } from "commander";
import { checkSchema } from "../check/schema.ts";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { EXIT } from "../exit.ts";
import { flags } from "../options.ts";
import { terminalOf } from "../ui/terminal.ts";

interface CheckFlags {
  readonly since?: number;
  readonly all?: boolean;
  readonly html?: string;
  readonly failOn?: "leave-out" | "care";
  readonly workers: number;
}

const READING = `
Verdicts: use; care (use with care); LEAVE OUT; too little (rain, to judge). The likely cause names the gauge, its
network, the radar, or a shower too small for a cell; its evidence stands under --json and --html. Bars of one screen
have one scale; an arrow goes on. Depths are those of the time that both sides observed.

Of the folder of a run, its own checks are shown. Of a plan, or with --since, the radar's depths are made anew from the
scans and nothing is kept.`;

/** `check PLAN|DIR`: what to believe, gauge by gauge and radar by radar. */
export function registerCheck(program: Command): void {
  const command = addCommand(
    program,
    "check <plan-or-dir>",
    "Which gauge and which radar to believe: a verdict and a likely cause for each, worst first, on one screen.",
    [
      "rainreckon check run",
      "rainreckon check plan.yaml --since 3h",
      "rainreckon check plan.yaml --since 3h --fail-on leave-out --quiet",
      "rainreckon check run --html check.html",
    ],
  );
  for (const option of [
    flags.since(),
    flags.everyGauge(),
    flags.checkHtml(),
    flags.failOn(),
    flags.workers(),
  ])
    command.addOption(option);
  command.addHelpText("after", READING);
  addSchemaFlag(command, checkSchema);
  command.action(async (target: string, options: CheckFlags) => {
    const terminal = terminalOf(command);
    const { check } = await import("../check/check.ts");
    const asked = {
      workers: options.workers,
      ...(options.since === undefined ? {} : { sinceMs: options.since }),
    };
    const document = await check(target, asked, terminal);
    if (options.html !== undefined) {
      const { writeCheckPage } = await import("../check/write-page.ts");
      await writeCheckPage(options.html, document);
    }
    if (terminal.json) printJson(terminal, checkSchema, document);
    else {
      const { checkText } = await import("../check/check-text.ts");
      terminal.result(checkText(document, options.all === true, terminal));
    }
    if (options.failOn !== undefined && fails(document, options.failOn)) process.exitCode = EXIT.failed;
  });
}

function fails(
  { gauges, radars }: { gauges: { verdict: string }[]; radars: { verdict: string }[] },
  on: "leave-out" | "care",
): boolean {
  const grave = new Set(on === "care" ? ["leave out", "use with care"] : ["leave out"]);
  return [...gauges, ...radars].some(({ verdict }) => grave.has(verdict));
}
