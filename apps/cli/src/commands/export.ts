import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { type ExportReport, exportSchema } from "../export/schema.ts";
import type { SeriesOf } from "../export/series.ts";
import { flags } from "../options.ts";
import { type Terminal, terminalOf } from "../ui/terminal.ts";

interface CommonFlags {
  readonly out: string;
  readonly force?: boolean;
}

interface SeriesFlags extends CommonFlags {
  readonly of: SeriesOf;
  readonly step?: string;
  readonly as: "depth" | "rate";
  readonly value: "best" | "radar" | "adjusted";
  readonly stamp: "end" | "start";
  readonly offset: number;
  readonly missing: string;
  readonly units: "mm" | "in";
}

/** `export`: what a finished run holds, in the form that another program takes. */
export function registerExport(program: Command): void {
  const group = addCommand(
    program,
    "export",
    "What a finished run holds, in the form that a model, a map or a statistics program takes. Nothing is reckoned anew.",
    ["rainreckon export series run -o rain.csv --step PT15M", "rainreckon export maps run -o maps"],
  );

  const series = exportCommand(
    group,
    "series <dir>",
    "One row a step, one column a catchment or asset: no row is missing, a step that was not observed has a code of its own, and a change of step neither gains nor loses water.",
    [
      "rainreckon export series run -o rain.csv",
      "rainreckon export series run -o rain.csv --step PT15M --as rate --stamp start --offset +01:00",
      "rainreckon export series run -o rain_in.csv --units in --missing NaN",
    ],
  );
  for (const option of [
    flags.outFile(),
    flags.seriesOf(),
    flags.step(),
    flags.depthOrRate(),
    flags.whichDepth(),
    flags.stampAt(),
    flags.clockOffset(),
    flags.missingCode(),
    flags.units(),
  ])
    series.addOption(option);
  series.action(async (folder: string) => {
    const { offset, out, force, ...asked } = series.opts<SeriesFlags>();
    const { finishedRun } = await import("../export/finished-run.ts");
    const { exportSeries } = await import("../export/series.ts");
    const report = await exportSeries(finishedRun(folder), {
      ...asked,
      file: out,
      replace: force === true,
      offsetMinutes: offset,
    });
    tell(terminalOf(series), report);
  });

  const maps = exportCommand(
    group,
    "maps <dir>",
    "A GeoTIFF for each interval of the run's maps: float32 in mm, tiled, packed, with overviews; NaN is not observed.",
    ["rainreckon export maps run -o maps", "rainreckon export maps run -o maps --value radar"],
  );
  maps.addOption(flags.outFolder()).addOption(flags.whichDepth());
  maps.action(async (folder: string) => {
    const { out, force, value } = maps.opts<SeriesFlags>();
    const { finishedRun } = await import("../export/finished-run.ts");
    const { exportMaps } = await import("../export/maps.ts");
    const asked = { folder: out, replace: force === true, value };
    tell(terminalOf(maps), await exportMaps(finishedRun(folder), asked));
  });

  const weights = exportCommand(
    group,
    "weights <dir>",
    "Which grid cells make up each catchment, and with what weight: for a model that reads totals.nc itself.",
    ["rainreckon export weights run -o weights.csv"],
  );
  weights.addOption(flags.outFile()).addOption(flags.planOfRun());
  weights.action(async (folder: string) => {
    const { out, force, plan } = weights.opts<CommonFlags & { plan?: string }>();
    const terminal = terminalOf(weights);
    const { finishedRun } = await import("../export/finished-run.ts");
    const { exportWeights } = await import("../export/weights.ts");
    const asked = { file: out, replace: force === true, ...(plan === undefined ? {} : { plan }) };
    tell(terminal, await exportWeights(finishedRun(folder), asked, terminal));
  });

  const pairs = exportCommand(
    group,
    "pairs <dir>",
    "The pairs of gauges and radar as Apache Parquet, with the columns of pairs.csv.",
    ["rainreckon export pairs run -o pairs.parquet"],
  );
  pairs.addOption(flags.outFile());
  pairs.action(async (folder: string) => {
    const { out, force } = pairs.opts<CommonFlags>();
    const { finishedRun } = await import("../export/finished-run.ts");
    const { exportPairs } = await import("../export/pairs.ts");
    tell(terminalOf(pairs), await exportPairs(finishedRun(folder), { file: out, replace: force === true }));
  });

  const tables = exportCommand(
    group,
    "tables <dir>",
    "The CSV tables of a run with depths in inches: columns that end in _mm end in _in.",
    ["rainreckon export tables run --units in -o tables_in"],
  );
  tables.addOption(flags.outFolder()).addOption(flags.inches());
  tables.action(async (folder: string) => {
    const { out, force } = tables.opts<CommonFlags>();
    const { finishedRun } = await import("../export/finished-run.ts");
    const { exportTables } = await import("../export/tables.ts");
    tell(
      terminalOf(tables),
      await exportTables(finishedRun(folder), { folder: out, replace: force === true }),
    );
  });
}

function exportCommand(group: Command, usage: string, about: string, examples: readonly string[]): Command {
  const command = addCommand(group, usage, about, examples).addOption(flags.overwrite());
  addSchemaFlag(command, exportSchema);
  return command;
}

function tell(terminal: Terminal, report: ExportReport): void {
  if (terminal.json) printJson(terminal, exportSchema, report);
  else {
    const [first = "", ...others] = report.files;
    const name = others.length === 0 ? first : `${first} and ${others.length} more`;
    terminal.result([`${name} written:`, ...report.says.map((line) => `  ${line}`)].join("\n"));
  }
}
