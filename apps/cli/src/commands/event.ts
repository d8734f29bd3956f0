import { InputError } from "@rainreckon/core";
import type { Command } from "commander";
import { addCommand, addSchemaFlag, printJson } from "../command.ts";
import type { EventAsked } from "../event/event.ts";
import { eventSchema } from "../event/schema.ts";
import type { LonLat } from "../explain/places-asked.ts";
import { flags } from "../options.ts";
import { counted } from "../ui/numbers.ts";
import { terminalOf } from "../ui/terminal.ts";

interface EventFlags {
  readonly at?: readonly LonLat[];
  readonly gauge?: readonly string[];
  readonly catchment?: readonly string[];
  readonly asset?: readonly string[];
  readonly assets?: string;
  readonly frequency?: string;
  readonly arealReduction?: string;
  readonly asSeries?: "AMS" | "PDS";
  readonly dryTime?: number;
  readonly thresholdMm?: number;
  readonly durations?: readonly number[];
  readonly clockAligned?: boolean;
  readonly fromGrid?: boolean;
  readonly plan?: string;
  readonly csv?: boolean;
  readonly html?: boolean;
  readonly out?: string;
  readonly bundle?: string;
  readonly licence?: readonly string[];
  readonly preparedBy?: string;
}

const WORDS = `
Where no place is named: all catchments and assets of the plan. Their steps stand in the tables of the run. Other
places have none, and the run is made again for them from the files of manifest.json, which takes as long as it did
on one processor: to the last bit what total would have given. --from-grid looks at the stored grid instead, at once,
and can tell no duration shorter than its intervals (an hour by default).

  in, mm     the largest depth that fell in this time, over the area that the head names; rolling windows of whole steps
  >=         a lower bound: seen in part, or at the hail cap
  years      return period by your own table, two figures; <2 and >100 are its ends, beyond which nothing is told.
             Each duration has its own: the largest of them is not "the" return period of the rain
  p10-p90    between the depths exceeded 9 times in 10 and once in 10, where the run knows them

Depths in mm, areas in km2, times in UTC unless a zone stands beside them. Totals and return periods do not replace
official warnings, local codes or the judgement of a licensed practitioner.`;

/** `event DIR`: events, depth by duration, return periods at points and catchments. */
export function registerEvent(program: Command): void {
  const command = addCommand(
    program,
    "event <dir>",
    "Rain events of a finished run: start, end, depth, the largest depths of 5 minutes to 7 days with their return periods by your own table, depth by area and duration.",
    [
      "rainreckon event run",
      "rainreckon event run --catchment SM-01 --frequency ddf.csv --areal-reduction arf.csv",
      "rainreckon event run --assets assets.csv --frequency ddf.csv --html --out pages",
      'rainreckon event run --at "51.20N 4.10E" --durations 5,15,60 --json',
      "rainreckon event run --asset PS-07 --frequency ddf.csv --bundle ps-07.tar.gz",
      "rainreckon event run --gauge saltwater/SW-03 --dry-time PT3H --threshold-mm 2",
    ],
  );
  for (const option of [
    flags.catchmentAsked(),
    flags.assetAsked(),
    flags.gaugeAsked(),
    flags.at(),
    flags.assetsFile(),
    flags.frequencyTable(),
    flags.arealReduction(),
    flags.asSeries(),
    flags.dryTime(),
    flags.thresholdMm(),
    flags.durations(),
    flags.clockAligned(),
    flags.fromGrid(),
    flags.eventCsv(),
    flags.pages(),
    flags.pagesFolder(),
    flags.bundleFile(),
    flags.licence(),
    flags.preparedBy(),
    flags.planOfRun(),
  ])
    command.addOption(option);
  command.addHelpText("after", WORDS);
  addSchemaFlag(command, eventSchema);
  command.action(async (folder: string, options: EventFlags) => {
    const terminal = terminalOf(command);
    if (options.csv === true && terminal.json) {
      throw new InputError("two forms of one result", "--csv with --json", "take one of them", {
        kind: "usage",
      });
    }
    const { eventsOfRun } = await import("../event/event.ts");
    if ((options.html === true) !== (options.out !== undefined)) {
      throw new InputError(
        "--html and --out go together",
        "command line, rainreckon event",
        "add --html --out DIR",
        { kind: "usage" },
      );
    }
    if (options.bundle === undefined && (options.licence ?? options.preparedBy) !== undefined) {
      throw new InputError(
        "these words belong to a bundle",
        "--licence, --prepared-by",
        "add --bundle FILE",
        {
          kind: "usage",
        },
      );
    }
    const asked: EventAsked = {
      catchments: options.catchment ?? [],
      assets: options.asset ?? [],
      gauges: options.gauge ?? [],
      points: options.at ?? [],
      assetsFile: options.assets,
      frequencyFile: options.frequency,
      arealReductionFile: options.arealReduction,
      shownAs: options.asSeries,
      dryTimeMs: options.dryTime,
      thresholdMm: options.thresholdMm,
      durationsMs: options.durations,
      clockAligned: options.clockAligned === true,
      fromGrid: options.fromGrid === true,
      plan: options.plan,
    };
    const outcome = await eventsOfRun(folder, asked, terminal);
    const { report } = outcome;
    if (options.out !== undefined) {
      const { writePages } = await import("../event/pages.ts");
      const files = await writePages(outcome, options.out);
      terminal.note(`${counted(files.length, "page")} in ${options.out}: begin with ${files[0]}`);
    }
    if (options.bundle !== undefined) {
      const { writeBundle } = await import("../event/bundle.ts");
      const { bundle: file, licence: licences = [], preparedBy } = options;
      await writeBundle(outcome, asked, { file, licences, preparedBy }, terminal);
    }
    if (options.csv === true) {
      const { eventCsv } = await import("../event/event-csv.ts");
      terminal.result((await eventCsv(report)).trimEnd());
    } else if (terminal.json) printJson(terminal, eventSchema, report);
    else {
      const { eventText } = await import("../event/event-text.ts");
      terminal.result(eventText(report));
    }
  });
}
