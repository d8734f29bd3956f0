import { InputError } from "@rainreckon/core";
import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { surveySchema } from "../survey/findings.ts";
import { walkFiles } from "../survey/walk.ts";
import { counted } from "../ui/numbers.ts";
import { terminalOf } from "../ui/terminal.ts";

/** `survey PATH…`: what I have, what is wrong with it, what I can make of it, the next command. */
export function registerSurvey(program: Command): void {
  const command = addCommand(
    program,
    "survey <path...>",
    "What lies in files and folders: scans, gauge readings, stations, catchments; what is wrong with them, what can be made of them, and the command to type next. Reads headers and the ends of tables only.",
    ["rainreckon survey data/", "rainreckon survey radar/ gauges/ catchments.geojson --json"],
  );
  addSchemaFlag(command, surveySchema);
  command.action(async (paths: string[]) => {
    const terminal = terminalOf(command);
    const walk = walkFiles(paths);
    const line = `${counted(walk.files.length, "file")} under ${paths.join(", ")}`;
    if (terminal.json) terminal.note(line);
    else terminal.result(`${line}\n`);
    // HDF5 and projections take a while to load: the first line does not wait for them, nor does help.
    const { survey } = await import("../survey/survey.ts");
    const { surveyText } = await import("../survey/survey-text.ts");
    const { findings } = await survey(paths, walk, terminal);
    if (terminal.json) printJson(terminal, surveySchema, findings);
    else terminal.result(surveyText(findings, terminal));
    const nothing =
      findings.radars.length +
        findings.grids.length +
        findings.gauges.length +
        findings.stations.length +
        findings.catchments.length ===
      0;
    if (nothing) {
      throw new InputError(
        "nothing here can be read",
        paths.join(", "),
        "name folders with scans (ODIM_H5, CfRadial, Archive Level II) or gridded rain, gauge tables or maps of catchments",
        {
          kind: "no-input",
        },
      );
    }
  });
}
