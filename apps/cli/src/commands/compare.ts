import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { compareRuns, compareSchema } from "../compare/compare-runs.ts";
import { compareText } from "../compare/compare-text.ts";
import { readRun } from "../compare/read-run.ts";
import { terminalOf } from "../ui/terminal.ts";

/** `compare DIR DIR`: which figures changed between two runs, and because of what. */
export function registerCompare(program: Command): void {
  const command = addCommand(
    program,
    "compare <dir-a> <dir-b>",
    "Which figures changed between two runs, and which plan values and inputs stand behind that.",
    ["rainreckon compare run-monday run-tuesday", "rainreckon compare run-monday run-tuesday --json"],
  );
  addSchemaFlag(command, compareSchema);
  command.action((folderA: string, folderB: string) => {
    const terminal = terminalOf(command);
    const comparison = compareRuns(readRun(folderA), readRun(folderB));
    if (terminal.json) printJson(terminal, compareSchema, comparison);
    else terminal.result(compareText(comparison));
  });
}
