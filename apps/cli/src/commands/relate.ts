import type { CapSetting } from "@rainreckon/core";
import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { flags } from "../options.ts";
import {
  relationsByName,
  relationTable,
  relationTableSchema,
  relationTableText,
} from "../relate/relation-table.ts";
import { terminalOf } from "../ui/terminal.ts";

interface TableFlags {
  readonly dbz: readonly number[];
  readonly relation?: readonly string[];
  readonly cap: CapSetting;
}

/** `relate table`: relations between reflectivity and rain rate, side by side. */
export function registerRelate(program: Command): void {
  const relate = addCommand(program, "relate", "Relations between reflectivity and rain rate.", [
    "rainreckon relate table",
  ]);
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
