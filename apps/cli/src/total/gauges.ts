import path from "node:path";
import {
  type GaugeSeries,
  type GaugeStation,
  type Grid,
  gaugeKey,
  InputError,
  type Interval,
  type Notice,
} from "@rainreckon/core";
import {
  displayText,
  type GaugeFileCounts,
  type GaugeRowFaults,
  looksSwapped,
  readGaugeFiles,
  readStations,
  type StationRow,
  stationsDuring,
} from "@rainreckon/formats";
import { type Projection, projection } from "@rainreckon/mosaic";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedGaugeFiles, LoadedPlan } from "../plan/load.ts";
import type { PlanGaugeFiles } from "../plan/schema.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { hashFile } from "./inputs.ts";
import { placePoint, WIDEN_GRID } from "./places.ts";

/** A gauge that can be compared: it has readings, a place, and a cell of the grid. */
export interface GaugeInput {
  readonly series: GaugeSeries;
  readonly station: GaugeStation;
  readonly xM: number;
  readonly yM: number;
  readonly cell: number;
  /** The cells that stand for it. */
  readonly cells: readonly number[];
  /** What was wrong with its rows; undefined for nothing. */
  readonly rowFaults: GaugeRowFaults | undefined;
}

/** What the gauge files of a plan came to. */
export interface GaugeInputs {
  readonly gauges: readonly GaugeInput[];
  readonly counts: readonly { readonly network: string; readonly counts: GaugeFileCounts }[];
}

/**
 * Reads all gauge files of a plan and puts the gauges on the grid. A gauge without a station, or outside
 * the grid, is left out and named; a network whose files cannot be read at all likewise.
 *
 * @param near - the radars, to tell coordinates that look swapped
 */
export async function readGauges(
  loaded: LoadedPlan,
  grid: Grid,
  map: Projection,
  window: Interval,
  near: readonly { readonly lonDeg: number; readonly latDeg: number }[],
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
): Promise<GaugeInputs> {
  const gauges: GaugeInput[] = [];
  const counts: { network: string; counts: GaugeFileCounts }[] = [];
  for (const entry of loaded.gaugeFiles) {
    const network = entry.spec.network;
    const relative = (text: string) => text.replaceAll(`${loaded.folder}${path.sep}`, "");
    const onNotice = (notice: Notice) =>
      log.add(`gauge data of ${network}`, { ...notice, where: relative(notice.where) });
    const used = new Map<string, "used" | "left out">();
    try {
      const contents = await readGaugeFiles(entry.files, entry.spec, onNotice, { window });
      for (const file of entry.files) used.set(file, "used");
      counts.push({ network, counts: contents.counts });
      if (entry.spec.status === "provisional") log.add("doubted", provisional(entry.spec));
      const stations = await stationsOf(entry, window, onNotice);
      for (const file of entry.stationsFiles) used.set(file, "used");
      const toWgs84 = projection(entry.spec.stations?.crs ?? "EPSG:4326");
      for (const series of contents.series) {
        const placed = placeGauge(series, stations, toWgs84, {
          grid,
          map,
          near,
          rule: loaded.plan.pairs.cell,
        });
        if ("what" in placed)
          log.add("gauge left out", { ...placed, where: `${network} ${displayText(series.id)}` });
        else gauges.push({ ...placed, rowFaults: contents.rowFaults.get(series.id) });
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      log.add("gauge files left out", { what: error.what, where: relative(error.where), fix: error.fix });
    }
    for (const file of new Set([...entry.files, ...entry.stationsFiles])) {
      try {
        const { name, sha256, bytes } = await hashFile(loaded.folder, file);
        const kind = entry.files.includes(file) ? "gauge readings" : "stations";
        seen({ path: name, kind, sha256, bytes, use: used.get(file) ?? "left out" });
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
      }
    }
  }
  const byKey = new Map<string, GaugeInput>();
  for (const gauge of gauges) {
    const key = gaugeKey(gauge.series);
    if (byKey.has(key)) {
      log.add("gauge left out", {
        what: "two entries of the plan give readings of this gauge; the first counts",
        where: `${gauge.series.network} ${displayText(gauge.series.id)}`,
        fix: "put the files of one network into one entry of gauges",
      });
    } else byKey.set(key, gauge);
  }
  for (const { network, gauge } of loaded.plan.overrides) {
    if (byKey.has(gaugeKey({ network, id: gauge }))) continue;
    log.add("override left out", {
      what: "it names a gauge that takes no part in this run",
      where: `plan, overrides: ${displayText(`${network} ${gauge}`)}`,
      fix: "check network and gauge",
    });
  }
  const sorted = [...byKey.values()].sort((a, b) => (gaugeKey(a.series) < gaugeKey(b.series) ? -1 : 1));
  return { gauges: sorted, counts };
}

/** What has to be said of a network that may still change its readings. */
function provisional({ network, retrieved }: PlanGaugeFiles): Notice {
  return {
    what: `the readings are provisional${retrieved === undefined ? "" : `, as fetched on ${retrieved}`}: the network may still change them`,
    where: `network ${network}`,
    fix: "run again once they are final, and write status: final",
  };
}

/** The stations of a network: the entries that hold in the window, and the ids that have others only. */
interface Stations {
  readonly byId: ReadonlyMap<string, StationRow>;
  readonly otherTimes: ReadonlySet<string>;
}

async function stationsOf(
  { spec, stationsFiles }: LoadedGaugeFiles,
  window: Interval,
  onNotice: (notice: Notice) => void,
): Promise<Stations> {
  const rows: StationRow[] = [];
  for (const file of stationsFiles) {
    rows.push(...(await readStations(file, spec.stations?.columns ?? NO_COLUMNS, onNotice, spec.stations)));
  }
  const byId = stationsDuring(rows, window, stationsFiles.join(", "), onNotice);
  return { byId, otherTimes: new Set(rows.map((row) => row.id).filter((id) => !byId.has(id))) };
}

/** A WaterML file has none. */
const NO_COLUMNS = { id: "id", x: "x", y: "y" } as const;

interface Surroundings {
  readonly grid: Grid;
  readonly map: Projection;
  readonly near: readonly { readonly lonDeg: number; readonly latDeg: number }[];
  readonly rule: "nearest" | "mean3x3";
}

function placeGauge(
  series: GaugeSeries,
  stations: Stations,
  toWgs84: Projection,
  { grid, map, near, rule }: Surroundings,
): Omit<GaugeInput, "rowFaults"> | { readonly what: string; readonly fix: string } {
  const row = stations.byId.get(series.id);
  if (row === undefined && stations.otherTimes.has(series.id)) {
    return {
      what: "its entries among the stations hold at other times than the window",
      fix: "check the dates in the stations file",
    };
  }
  if (row === undefined) {
    return {
      what: "it has readings but no station",
      fix: "add it to the stations file, or check its id there",
    };
  }
  const [lonDeg, latDeg] = toWgs84.geographic ? [row.x, row.y] : toWgs84.inverse(row.x, row.y);
  if (looksSwapped(lonDeg, latDeg, near)) {
    return {
      what: `its coordinates ${row.x}, ${row.y} look swapped: latitude and longitude exchanged lie near the radars`,
      fix: "exchange them in the stations file, or name the columns the other way round in the plan",
    };
  }
  if (!(Math.abs(latDeg) <= 90 && Math.abs(lonDeg) <= 360)) {
    return {
      what: `its coordinates ${row.x}, ${row.y} are no place on Earth`,
      fix: "check them, and stations.crs in the plan",
    };
  }
  const { xM, yM, cell, cells } = placePoint(grid, map, { lonDeg, latDeg }, rule);
  if (cell < 0) {
    return { what: "it lies outside the grid", fix: `${WIDEN_GRID}, if a radar reaches it` };
  }
  const station: GaugeStation = {
    network: series.network,
    id: series.id,
    lonDeg,
    latDeg,
    ...(row.name === undefined ? {} : { name: row.name }),
    ...(row.elevationM === undefined ? {} : { elevationM: row.elevationM }),
    ...(row.tipMm === undefined ? {} : { tipMm: row.tipMm }),
    ...(row.heated === undefined ? {} : { heated: row.heated }),
    ...(row.corrections === undefined ? {} : { corrections: row.corrections }),
  };
  return { series, station, xM, yM, cell, cells };
}
