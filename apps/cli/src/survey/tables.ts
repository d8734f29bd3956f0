import path from "node:path";
import type { Notice } from "@rainreckon/core";
import {
  looksSwapped,
  type ReadingsGuess,
  readStations,
  type StationRow,
  type StationsGuess,
} from "@rainreckon/formats";
import { geodesicInverse, projection } from "@rainreckon/mosaic";
import { counted, isoUtc } from "../ui/numbers.ts";
import type { GaugeFinding, RadarFinding, StationFinding } from "./findings.ts";
import { networkName } from "./network-name.ts";
import type { Point } from "./survey-result.ts";

export interface SeenReadings {
  readonly file: string;
  readonly guess: ReadingsGuess;
}

export interface SeenStations {
  readonly file: string;
  readonly guess: StationsGuess;
  readonly rows: readonly StationRow[];
}

/** A table of stations with all its rows; the faults of the rows go to `onNotice`. */
export async function readSeenStations(
  file: string,
  guess: StationsGuess,
  onNotice: (notice: Notice) => void,
): Promise<SeenStations> {
  const { columns, encoding, headerLine, decimal } = guess;
  const form = { encoding: encoding.value, headerLine, decimal };
  return { file, guess, rows: await readStations(file, columns.value, onNotice, form) };
}

/** The monitoring points of a WaterML file, as a table of stations in longitude and latitude. */
export async function readWaterMlPoints(
  file: string,
  onNotice: (notice: Notice) => void,
): Promise<SeenStations> {
  const columns = { id: "id", x: "lon", y: "lat" };
  const rows = await readStations(file, columns, onNotice);
  const reason = "WaterML gives the positions itself";
  const guess: StationsGuess = {
    columns: { value: columns, standing: "found", reason },
    crs: { value: "EPSG:4326", standing: "found", reason },
    decimal: "point",
    encoding: { value: "utf-8", standing: "found", reason },
    ids: rows.map((row) => row.id),
    whole: true,
  };
  return { file, guess, rows };
}

export interface TableFindings {
  readonly gauges: readonly GaugeFinding[];
  readonly stations: readonly StationFinding[];
  /** Where gauges with readings stand, within the reach of a radar. */
  readonly points: readonly Point[];
}

/** Brings readings and stations together; what does not fit goes to `onNotice`. */
export function tableFindings(
  readings: readonly SeenReadings[],
  tables: readonly SeenStations[],
  radars: readonly RadarFinding[],
  onNotice: (notice: Notice) => void,
): TableFindings {
  const gauges = settleKinds(settleDates(readings.map((seen) => gaugeFinding(seen, tables))));
  for (const gauge of gauges) tellGaugeFaults(gauge, onNotice);
  const stations = tables.map((table) => stationFinding(table, gauges));
  const points = tables.flatMap((table) => stationPoints(table, gauges, radars, onNotice));
  return { gauges, stations, points };
}

/**
 * Files of one network and form write dates alike: what a day above 12 tells in one of them holds for those
 * in which nothing does.
 */
function settleDates(gauges: readonly GaugeFinding[]): GaugeFinding[] {
  const form = ({ network, layout, columns }: GaugeFinding) =>
    JSON.stringify([network.value, layout.value, columns.value]);
  return gauges.map((gauge) => {
    if (gauge.dates.value !== "ask") return gauge;
    const alike = gauges.filter((other) => form(other) === form(gauge) && other.dates.value !== "ask");
    const orders = new Set(alike.map((other) => other.dates.value));
    if (orders.size !== 1) return gauge;
    const [teller] = alike as [GaugeFinding];
    return { ...gauge, dates: { ...teller.dates, reason: `${teller.dates.reason} (in ${teller.file})` } };
  });
}

/**
 * Files of one gauge each are of one kind in a network: what most of them look like, since a gauge that saw
 * little rain may look like anything.
 */
function settleKinds(gauges: readonly GaugeFinding[]): GaugeFinding[] {
  const form = ({ network, columns, idFrom }: GaugeFinding) =>
    JSON.stringify([network.value, columns.value, idFrom.value]);
  return gauges.map((gauge) => {
    if (gauge.idFrom.value === "column") return gauge;
    const alike = gauges.filter((other) => form(other) === form(gauge));
    const votes = (kind: GaugeFinding["kind"]) =>
      alike.filter((other) => other.kind.value === kind.value).length;
    const [leader] = alike.toSorted((a, b) => votes(b.kind) - votes(a.kind)) as [GaugeFinding];
    if (leader.kind.value === gauge.kind.value) return gauge;
    const { tipMm: _tipMm, ...rest } = gauge;
    const reason = `${leader.kind.reason} (in most files of the network)`;
    return {
      ...rest,
      kind: { ...leader.kind, reason },
      unit: leader.unit,
      ...(leader.tipMm === undefined ? {} : { tipMm: leader.tipMm }),
    };
  });
}

/** What the name of the file of one gauge is, with {id} for the id that a table of stations knows. */
function nameWithId(file: string, tables: readonly SeenStations[]): { id: string; fileName: string } {
  const stem = path.basename(file, path.extname(file));
  const parts = new Set([stem, ...stem.split(/[\s_.-]+/)]);
  const known = tables
    .flatMap((table) => table.rows.map((row) => row.id))
    .filter((id) => parts.has(id))
    .sort((a, b) => b.length - a.length)[0];
  if (known === undefined) return { id: stem, fileName: "{id}" };
  const at = stem.indexOf(known);
  // Dates and numbers change from file to file.
  const anyNumber = (text: string) => text.replace(/\d+/g, "*").replace(/\*([\s_.-]\*)+/g, "*");
  return {
    id: known,
    fileName: `${anyNumber(stem.slice(0, at))}{id}${anyNumber(stem.slice(at + known.length))}`,
  };
}

function gaugeFinding({ file, guess }: SeenReadings, tables: readonly SeenStations[]): GaugeFinding {
  const named = guess.idFrom.value === "file" ? nameWithId(file, tables) : undefined;
  const gaugeIds = named === undefined ? guess.gaugeIds : [named.id];
  const table = stationsFor(gaugeIds, file, tables);
  const known = new Set(table?.rows.map((row) => row.id));
  return {
    file,
    network: networkName(file, guess.idFrom.value !== "column"),
    layout: guess.layout,
    kind: guess.kind,
    unit: guess.unit,
    ...(guess.tipMm === undefined ? {} : { tipMm: guess.tipMm }),
    columns: guess.columns,
    ...(guess.stepMinutes === undefined ? {} : { stepMinutes: guess.stepMinutes }),
    zone: { ...guess.zone, value: guess.zone.value ?? null },
    missing: { ...guess.missing, value: [...guess.missing.value] },
    qualityCodes: [...guess.qualityCodes],
    firstStamp: stampOrNull(guess.firstEpochMs),
    lastStamp: stampOrNull(guess.lastEpochMs),
    encoding: guess.encoding,
    ...(guess.headerLine === undefined ? {} : { headerLine: guess.headerLine }),
    decimal: guess.decimal,
    dates: guess.dates,
    dateOnly: guess.dateOnly,
    idFrom: guess.idFrom,
    ...(named === undefined ? {} : { fileName: named.fileName }),
    ...(guess.label === undefined ? {} : { label: guess.label }),
    ...(guess.stamp === undefined ? {} : { stamp: guess.stamp }),
    gaugeIds: [...gaugeIds],
    allGaugeIdsSeen: guess.allGaugesSeen,
    ...(table === undefined ? {} : { stationsFile: table.file }),
    withoutStation: table === undefined ? [...gaugeIds] : gaugeIds.filter((id) => !known.has(id)),
  };
}

/** A table of points without readings is one of assets where its name says so. */
const ASSET_NAME = /asset/i;

function stampOrNull(epochMs: number): string | null {
  return Number.isFinite(epochMs) ? isoUtc(epochMs) : null;
}

/** The table that names most of the gauges; of equals, the one whose file is named most like the readings'. */
function stationsFor(
  ids: readonly string[],
  file: string,
  tables: readonly SeenStations[],
): SeenStations | undefined {
  const network = networkName(file).value;
  const scored = tables.map((table) => {
    const known = new Set(table.rows.map((row) => row.id));
    return {
      table,
      named: ids.filter((id) => known.has(id)).length,
      alike: table.file.includes(network) ? 1 : 0,
    };
  });
  const best = scored
    .filter(({ named }) => named > 0)
    .sort((a, b) => b.named - a.named || b.alike - a.alike)[0];
  return best?.table;
}

function tellGaugeFaults(gauge: GaugeFinding, onNotice: (notice: Notice) => void): void {
  const where = gauge.file;
  if (gauge.stationsFile === undefined) {
    onNotice({
      what: "no table of stations names its gauges",
      where,
      fix: "add a CSV with id, name and coordinates",
    });
  } else {
    for (const id of gauge.withoutStation) {
      onNotice({
        what: `gauge ${id} has readings and no station`,
        where,
        fix: `add it to ${gauge.stationsFile}`,
      });
    }
  }
  if (gauge.dates.value === "ask") {
    onNotice({
      what: `day and month cannot be told apart: ${gauge.dates.reason}`,
      where,
      fix: "write dates: dmy or dates: mdy in the plan",
    });
  }
  if (gauge.dateOnly) {
    onNotice({
      what: "its stamps are dates without a time of day",
      where,
      fix: "ask when the network's days begin, and write dayHour and stamp (start or end) in the plan",
    });
  }
  if (gauge.zone.value === null) {
    onNotice({
      what: "the stamps name no zone",
      where,
      fix: "ask the network, and write zone and dst in the plan",
    });
  }
}

function stationFinding(
  { file, guess, rows }: SeenStations,
  gauges: readonly GaugeFinding[],
): StationFinding {
  const users = gauges.filter((gauge) => gauge.stationsFile === file);
  const withReadings = new Set(users.flatMap((gauge) => gauge.gaugeIds));
  const complete = users.every((gauge) => gauge.allGaugeIdsSeen);
  const columns = Object.fromEntries(
    Object.entries(guess.columns.value).filter(([, header]) => header !== undefined),
  ) as StationFinding["columns"]["value"];
  return {
    file,
    columns: { ...guess.columns, value: columns },
    ...(guess.encoding === undefined ? {} : { encoding: guess.encoding }),
    ...(guess.headerLine === undefined ? {} : { headerLine: guess.headerLine }),
    decimal: guess.decimal,
    assets: users.length === 0 && ASSET_NAME.test(path.basename(file)),
    stationCount: new Set(rows.map((row) => row.id)).size,
    crs: { ...guess.crs, value: guess.crs.value ?? null },
    withoutReadings: complete
      ? rows.map((row) => row.id).filter((stationId) => !withReadings.has(stationId))
      : [],
  };
}

function stationPoints(
  { file, guess, rows }: SeenStations,
  gauges: readonly GaugeFinding[],
  radars: readonly RadarFinding[],
  onNotice: (notice: Notice) => void,
): Point[] {
  const users = gauges.filter((gauge) => gauge.stationsFile === file);
  if (users.length === 0 && ASSET_NAME.test(path.basename(file))) return [];
  if (users.length === 0) {
    onNotice({
      what: "no gauge file has readings of these stations",
      where: file,
      fix: "add the readings, or leave the table out",
    });
    return [];
  }
  if (guess.crs.value === undefined) {
    onNotice({
      what: "x and y are not degrees, and the file does not say what they are",
      where: file,
      fix: "write the EPSG code of their coordinate system in the plan: gauges, stations, crs",
    });
    return [];
  }
  const { inverse } = projection(guess.crs.value);
  const withReadings = new Set(users.flatMap((gauge) => gauge.gaugeIds));
  const complete = users.every((gauge) => gauge.allGaugeIdsSeen);
  const points: Point[] = [];
  for (const row of rows) {
    if (complete && !withReadings.has(row.id)) continue;
    const [lonDeg, latDeg] = inverse(row.x, row.y);
    const fault = placeFault({ lonDeg, latDeg }, radars);
    if (fault === undefined) points.push({ lonDeg, latDeg });
    else
      onNotice({
        what: `station ${row.id} ${fault.what}`,
        where: `${file}, line ${row.line}`,
        fix: fault.fix,
      });
  }
  return points;
}

function placeFault(
  point: Point,
  radars: readonly RadarFinding[],
): { what: string; fix: string } | undefined {
  if (!(Math.abs(point.latDeg) <= 90 && Math.abs(point.lonDeg) <= 360)) {
    return {
      what: "has coordinates that are nowhere on earth",
      fix: "mend its coordinates, or their coordinate system in the plan",
    };
  }
  if (radars.length === 0) return undefined;
  const kmBeyond = Math.min(
    ...radars.map((radar) => geodesicInverse(radar, point).distanceM / 1000 - radar.maxRangeKm),
  );
  if (kmBeyond <= 0) return undefined;
  if (looksSwapped(point.lonDeg, point.latDeg, radars)) {
    return { what: "looks as if longitude and latitude were swapped", fix: "exchange the two numbers" };
  }
  return {
    what: `lies ${counted(Math.ceil(kmBeyond), "km", "km")} beyond the reach of every radar`,
    fix: "nothing to do, if that is right; the map will not reach out to it",
  };
}
