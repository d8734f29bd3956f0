import { readTerrainProfile } from "@rainreckon/formats";
import type { Command } from "commander";
import { budgetText } from "../budget/budget-text.ts";
import { type ParameterFlags, radarOfBand, radarOfFlags, withFlags } from "../budget/known-radar.ts";
import { budgetSchema } from "../budget/schema.ts";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import { EXIT } from "../exit.ts";
import { flags } from "../options.ts";
import { relationsByName } from "../relate/relation-table.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { terminalOf } from "../ui/terminal.ts";

interface BudgetFlags extends ParameterFlags {
  readonly band?: readonly string[];
  readonly detection: number;
  readonly radome: number;
  readonly temperature: number;
  readonly pressure: number;
  readonly humidity: number;
  readonly relation: string;
  readonly rainKm: number;
  readonly ranges: readonly number[];
  readonly meltingLayer?: { readonly bottomM: number; readonly topM: number };
  readonly terrain?: string;
  readonly chart?: string;
  readonly strict?: boolean;
}

const COLUMNS = `
Columns by range:
  beam             height of the beam's centre, 4/3-earth refraction: rain below it is not seen
  beam width       between the half-power points, upwards: what one gate averages over
  melting          share of the echo that comes from the melting layer (two-way Gaussian beam)
  gas              loss by oxygen and water vapour, BOTH ways, along the climbing beam (ITU-R P.676);
                   many data sets are corrected for it already
  weakest          smallest reflectivity told from noise at that range, losses by gases and radome included
  lightest         the rain rate of that echo, by the relation in use: lighter rain is not seen
  drop             diameter of the smallest single drop that is seen (point target on the axis);
                   none: no drop is that large
Columns for rain:
  one way          specific attenuation by ITU-R P.838-3, a fit for radio links
  by drops         the same for a Marshall-Palmer spectrum of spheres: how sure the figure is
  both ways        what the echo behind that rain has lost
  share of Z lost  3 dB take half of it
  shown as         rate that the relation makes of the same rain behind that path, if nothing is corrected
Columns for drops:
  half of Z above  diameter above which drops make half of Z; of R likewise
  beyond Rayleigh  share of Z from drops above a 16th of the wavelength, where Z is no sixth moment
  shown over Z     echo of those drops over their sixth moment`;

/** `budget`: the radar equation for sites in files, bands or parameters, side by side. */
export function registerBudget(program: Command): void {
  const command = addCommand(
    program,
    "budget [files...]",
    "The radar equation at work: what a radar can see, and what air, rain and a wet radome cost it, by range. For sites in scan files, example radars of a band, or parameters; several stand side by side.",
    [
      "rainreckon budget --band S,C,X --rain-km 30",
      "rainreckon budget scan.h5 --chart budget.svg",
      "rainreckon budget --frequency 5.6 --peak-power 250000 --beam-width 1 --pulse 2 --noise-figure 3 --losses 2",
      "rainreckon budget scan.h5 --band X --radome 3 --melting-layer 1900..2400 --json",
    ],
  );
  for (const option of [
    flags.band(),
    flags.frequency(),
    flags.wavelength(),
    flags.peakPower(),
    flags.gain(),
    flags.beamWidth(),
    flags.dish(),
    flags.pulse(),
    flags.noiseFigure(),
    flags.bandwidth(),
    flags.detection(),
    flags.losses(),
    flags.radome(),
    flags.prf(),
    flags.antennaHeight(),
    flags.elevation(),
    flags.temperature(),
    flags.pressure(),
    flags.humidity(),
    flags.budgetRelation(),
    flags.rainKm(),
    flags.ranges(),
    flags.meltingLayer(),
    flags.terrain(),
    flags.chart(),
    flags.strict(),
  ])
    command.addOption(option);
  command.addHelpText("after", COLUMNS);
  addSchemaFlag(command, budgetSchema);
  command.action(async (files: string[]) => {
    const options = command.opts<BudgetFlags>();
    const terminal = terminalOf(command);
    const log = leftOutLog(terminal);
    const [relation] = relationsByName([options.relation]);
    const terrain = options.terrain === undefined ? undefined : readTerrainProfile(options.terrain);
    const ofBands = (options.band ?? []).map((letter) => radarOfBand(letter, options));
    const ofFiles = files.length === 0 ? [] : await fileRadars(files, options, log);
    const radars = [...ofFiles, ...ofBands];
    if (radars.length === 0) radars.push(radarOfFlags(options));
    const { reckonBudget } = await import("../budget/reckon.ts");
    const settings = {
      relation: relation as NonNullable<typeof relation>,
      temperatureC: options.temperature,
      pressureHPa: options.pressure,
      relativeHumidityPercent: options.humidity,
      radomeLossDb: options.radome,
      detectionDb: options.detection,
      rainKm: options.rainKm,
      rangesKm: options.ranges,
      meltingLayer: options.meltingLayer,
      terrain,
    };
    const budget = reckonBudget(radars, settings);
    if (options.chart !== undefined) {
      const { writeBudgetChart } = await import("../budget/write-chart.ts");
      await writeBudgetChart(options.chart, radars, settings, budget);
      terminal.note(`chart: ${options.chart}`);
    }
    if (terminal.json) printJson(terminal, budgetSchema, budget);
    else terminal.result(budgetText(budget, terminal));
    log.finish();
    if (options.strict === true && log.count > 0) process.exitCode = EXIT.failed;
  });
}

async function fileRadars(
  files: readonly string[],
  options: BudgetFlags,
  log: ReturnType<typeof leftOutLog>,
) {
  // HDF5 takes a while to load, and budgets of bands do without.
  const { radarsOfFiles } = await import("../budget/radars-of-files.ts");
  const radars = await radarsOfFiles(files, (notice) => log.add("file left out", notice));
  return radars.map((radar) => withFlags(radar, options));
}
