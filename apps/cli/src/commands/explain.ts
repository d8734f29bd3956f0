import { InputError } from "@rainreckon/core";
import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { EXIT } from "../exit.ts";
import type { LonLat } from "../explain/places-asked.ts";
import { explainSchema } from "../explain/schema.ts";
import { flags } from "../options.ts";
import { terminalOf } from "../ui/terminal.ts";

interface ExplainFlags {
  readonly at?: readonly LonLat[];
  readonly gauge?: readonly string[];
  readonly catchment?: readonly string[];
  readonly from?: number;
  readonly to?: number;
  readonly plan?: string;
  readonly csv?: boolean;
}

const COLUMNS = `
An account of a place is that of the grid cell that holds it. Its rows:
  scan       the sweep that spoke for the cell; its gates whose centres lie in the cell, each with its stored number,
             dBZ, the screens that met it, every correction in dB by name, what made the rate, and the cap
  rate       the mean over the cell's gates that speak
  hours      what the rates at both ends of a stretch between two scans count for in a step (trapezoid)
  share      of the source among those that observed
  depth      share x (hours x rate + next hours x next rate); the depths add up to the total

The run is made again from the files of manifest.json, and takes as long as it did on one processor. A file that is
missing, or whose SHA-256 differs, is refused. Gauges are those of the adjustment; by how much the figure moves with
each, and what it would be without it, is found by letting the method learn anew.`;

/** `explain DIR`: how a number came to be, scan by scan. */
export function registerExplain(program: Command): void {
  const command = addCommand(
    program,
    "explain <dir>",
    "How a depth came to be, scan by scan: every gate, correction and share from the stored number to the total, and what the adjusted figure owes to which gauges.",
    [
      'rainreckon explain run --at "51.20N 4.10E"',
      "rainreckon explain run --gauge saltwater/SW-03 --from 2031-05-20T12:00Z --to 2031-05-20T13:00Z",
      "rainreckon explain run --catchment SM-01 --json",
      'rainreckon explain run --at "51.20N 4.10E" --csv > rows.csv',
    ],
  );
  for (const option of [
    flags.at(),
    flags.gaugeAsked(),
    flags.catchmentAsked(),
    flags.spanFrom(),
    flags.spanTo(),
    flags.csv(),
    flags.planOfRun(),
  ])
    command.addOption(option);
  command.addHelpText("after", COLUMNS);
  addSchemaFlag(command, explainSchema);
  command.action(async (folder: string, options: ExplainFlags) => {
    const terminal = terminalOf(command);
    const asked = {
      points: options.at ?? [],
      gauges: options.gauge ?? [],
      catchments: options.catchment ?? [],
    };
    refuseUnclear(asked, options.csv === true);
    const { explainRun } = await import("../explain/explain.ts");
    const explanation = await explainRun(
      folder,
      { asked, plan: options.plan, from: options.from, to: options.to },
      terminal,
    );
    if (options.csv === true) {
      const { explainCsv } = await import("../explain/explain-csv.ts");
      terminal.result((await explainCsv(explanation)).trimEnd());
    } else if (terminal.json) printJson(terminal, explainSchema, explanation);
    else {
      const { explainText } = await import("../explain/explain-text.ts");
      terminal.result(explainText(explanation));
    }
    const astray = [...explanation.points, ...explanation.catchments].filter(({ end }) => !end.exact);
    if (astray.length === 0) return;
    terminal.note(
      `${astray.length} of the accounts do not end on what is stored: see run.version and remarks`,
    );
    process.exitCode = EXIT.failed;
  });
}

function refuseUnclear(
  asked: {
    readonly points: readonly unknown[];
    readonly gauges: readonly unknown[];
    readonly catchments: readonly unknown[];
  },
  csv: boolean,
): void {
  const points = asked.points.length + asked.gauges.length;
  if (points + asked.catchments.length === 0) {
    throw new InputError(
      "a place is missing",
      "command line, rainreckon explain",
      'add --at "51.20N 4.10E", --gauge NETWORK/ID or --catchment ID',
      { kind: "usage" },
    );
  }
  if (csv && points > 0 && asked.catchments.length > 0) {
    throw new InputError(
      "cells and catchments have different rows, and a CSV holds one table",
      "command line, rainreckon explain",
      "ask for them one after the other, or take --json",
      { kind: "usage" },
    );
  }
}
