import {
  type GaugeSeries,
  InputError,
  type Interval,
  MM_PER_INCH,
  QUALITY_DOUBT,
  QUALITY_DROP,
  QUALITY_USE,
} from "@rainreckon/core";
import { belowOf, type DecimalMark, decimalOf, decimalsOf, whyNoNumber } from "./decimal.ts";
import { columnIndex, type RowHandler, streamRows } from "./delimited.ts";
import { displayText } from "./display-text.ts";
import { FileNotices, type OnNotice } from "./file-notices.ts";
import { type GaugeFileCounts, noGaugeFileCounts } from "./gauge-file-counts.ts";
import {
  checkGaugeFileSpec,
  DEFAULT_TRACE,
  type GaugeFileSpec,
  mmPerUnit,
  silenceOf,
} from "./gauge-file-spec.ts";
import { idOfWholeFile } from "./gauge-of-file.ts";
import { type GaugePiece, type GaugeRows, joinPieces, utcText } from "./gauge-rows.ts";
import { readingsOf } from "./readings.ts";
import { settleTimes } from "./settle-times.ts";
import { fillSilence } from "./silence.ts";
import { StampScanner } from "./stamp.ts";
import { ACCUMULATED, Track, TrackColumn } from "./track.ts";
import { readWaterMl, type WaterMlSeries } from "./waterml.ts";
import { ZoneClock } from "./zone-clock.ts";

const HOUR_MS = 3_600_000;
/** Most gauges of one network, and most cells with readings, that are kept in memory. */
const MAX_GAUGES = 20_000;
const MAX_CELLS = 200_000_000;
/** More decimals than this are a rounding of the writer, not what the gauge can tell. */
const MAX_DECIMALS = 4;

export interface GaugeFileOptions {
  /** Time to fill where silence means dry; the span of the files' own rows where left out. */
  readonly window?: Interval;
}

/** What was wrong with the rows of one gauge and has been settled. */
export interface GaugeRowFaults {
  /** Rows with an instant that another has, whether their values agree or not. */
  readonly duplicateRows: number;
  readonly counterResets: number;
  /** Readings that cannot be, and are not observed. */
  readonly impossible: number;
}

export interface GaugeFileContents {
  /** One per gauge, by id in code-unit order. */
  readonly series: readonly GaugeSeries[];
  /** By id; gauges without any are absent. */
  readonly rowFaults: ReadonlyMap<string, GaugeRowFaults>;
  readonly counts: GaugeFileCounts;
  /** First and last stamp with a settled instant; NaN where there is none. */
  readonly firstEpochMs: number;
  readonly lastEpochMs: number;
}

/** As {@link readGaugeFiles}, of one file. */
export function readGaugeFile(
  path: string,
  spec: GaugeFileSpec,
  onNotice: OnNotice,
  options: GaugeFileOptions = {},
): Promise<GaugeFileContents> {
  return readGaugeFiles([path], spec, onNotice, options);
}

/**
 * Reads the gauge files of one network, long or wide, into a series per gauge.
 *
 * The files are read as one: a gauge may go on from file to file, and a row given twice is found across
 * them. Depths are in mm. A value that is missing, cannot be read or cannot be true becomes a NaN reading,
 * never 0; rows whose time cannot be told are left out. All of it is counted and named by file and line.
 *
 * @param paths - CSV or WaterML 2.0, in the order in which the first of two differing rows is to win
 * @param onNotice - told of each fault, at most ten of a kind, then of how many more there were
 * @throws InputError where a file cannot be read at all, or (usage) where the spec contradicts itself
 */
export async function readGaugeFiles(
  paths: readonly string[],
  spec: GaugeFileSpec,
  onNotice: OnNotice,
  options: GaugeFileOptions = {},
): Promise<GaugeFileContents> {
  checkGaugeFileSpec(spec);
  const silence = silenceOf(spec);
  const counts = noGaugeFileCounts();
  const notices = new FileNotices(onNotice);
  const clock = new ZoneClock(spec.zone, spec.dst);
  const collector = new RowCollector(spec, clock, counts, notices);
  const pieces = new Map<string, GaugePiece[]>();
  for (const path of paths) {
    for (const track of await collector.collect(path)) {
      const times = settleTimes(track, spec.kind !== "tips", counts, notices);
      for (const column of track.columns) {
        const sofar = pieces.get(column.id);
        if (sofar === undefined) pieces.set(column.id, [{ track, column, times }]);
        else sofar.push({ track, column, times });
      }
    }
  }

  const faults = new RowFaults(counts);
  const gauges = [...pieces.keys()]
    .sort()
    .map((id) => faults.during(id, () => joinPieces(id, pieces.get(id)!, counts, notices)));
  const { firstEpochMs, lastEpochMs } = spanOf(gauges);
  const span = options.window ?? { startEpochMs: firstEpochMs, endEpochMs: lastEpochMs };
  if (silence.rule === "dry" && span.endEpochMs - lastEpochMs > HOUR_MS) {
    notices.tell(
      "files that end before the window",
      `no row of network "${displayText(spec.network, 60)}" is later than ${utcText(lastEpochMs)}; the rest of the window counts as dry, since silence is dry`,
      paths[paths.length - 1],
      [],
      "end the window there, or fetch the newer rows",
    );
  }
  const context = { spec, silence, counts, notices, clock };
  const series = gauges.map((rows) => {
    const { readings, stepMs } = faults.during(rows.id, () => readingsOf(rows, context));
    const { readings: filled, dryMs } = fillSilence(readings, silence, span, rows.uncertain);
    counts.silentDryHours += dryMs / HOUR_MS;
    const resolutionMm = resolutionOf(rows, spec, stepMs);
    return {
      network: spec.network,
      id: rows.id,
      ...(stepMs === undefined ? {} : { stepMs }),
      ...(resolutionMm === undefined ? {} : { resolutionMm }),
      startEpochMs: filled.startEpochMs.view().slice(),
      endEpochMs: filled.endEpochMs.view().slice(),
      depthMm: filled.depthMm.view().slice(),
      quality: new Uint8Array(filled.quality.view()),
    };
  });
  counts.files = paths.length;
  counts.gauges = series.length;
  if (spec.kind === "tips" && counts.duplicatesSame > 0) {
    notices.tell(
      "repeated tips",
      `${counts.duplicatesSame} tips have the gauge and stamp of another and count once`,
      paths.length === 1 ? paths[0] : `gauge files of network ${spec.network}`,
      [],
      "if the logger writes whole minutes, give the number of tips in a minute instead",
    );
  }
  notices.close();
  return { series, rowFaults: faults.byId, counts, firstEpochMs, lastEpochMs };
}

/** Tells the counts of a network apart by gauge. */
class RowFaults {
  readonly byId = new Map<string, GaugeRowFaults>();
  readonly #counts: GaugeFileCounts;

  constructor(counts: GaugeFileCounts) {
    this.#counts = counts;
  }

  /** Whatever is counted while `work` runs is the gauge's. */
  during<T>(id: string, work: () => T): T {
    const before = { ...this.#counts };
    const done = work();
    const risen = (...keys: (keyof GaugeFileCounts)[]) =>
      keys.reduce((sum, key) => sum + this.#counts[key] - before[key], 0);
    const known = this.byId.get(id);
    const faults = {
      duplicateRows: (known?.duplicateRows ?? 0) + risen("duplicatesSame", "duplicatesDifferent"),
      counterResets: (known?.counterResets ?? 0) + risen("counterResets"),
      impossible: (known?.impossible ?? 0) + risen("impossible"),
    };
    if (Object.values(faults).some((count) => count > 0)) this.byId.set(id, faults);
    return done;
  }
}

function spanOf(gauges: readonly GaugeRows[]): { firstEpochMs: number; lastEpochMs: number } {
  let firstEpochMs = Number.NaN;
  let lastEpochMs = Number.NaN;
  for (const { epochMs } of gauges) {
    if (epochMs.length === 0) continue;
    if (!(firstEpochMs <= epochMs[0])) firstEpochMs = epochMs[0];
    if (!(lastEpochMs >= epochMs[epochMs.length - 1])) lastEpochMs = epochMs[epochMs.length - 1];
  }
  return { firstEpochMs, lastEpochMs };
}

/** One tip where its depth is known, else one unit of the last digit. */
function resolutionOf(rows: GaugeRows, spec: GaugeFileSpec, stepMs: number | undefined): number | undefined {
  if (spec.tipMm !== undefined) return spec.tipMm;
  if (rows.decimals > MAX_DECIMALS || rows.epochMs.length === 0) return undefined;
  const unit = 10 ** -rows.decimals * mmPerUnit(spec);
  if (spec.kind !== "intensity") return unit;
  return stepMs === undefined ? undefined : (unit * stepMs) / HOUR_MS;
}

/** Reads the rows of files into tracks: cells to numbers, stamps to instants, nothing ordered yet. */
class RowCollector {
  readonly #spec: GaugeFileSpec;
  readonly #counts: GaugeFileCounts;
  readonly #notices: FileNotices;
  readonly #clock: ZoneClock;
  readonly #stamps: StampScanner;
  readonly #decimal: DecimalMark;
  /** Levels and tips are no depths: "below" or "a trace" says nothing of them. */
  readonly #measuresDepth: boolean;
  readonly #traceTexts: ReadonlySet<string>;
  readonly #mmPerUnit: number;
  readonly #missingTexts: ReadonlySet<string>;
  readonly #missingNumbers: ReadonlySet<number>;
  readonly #qualityOfCode: ReadonlyMap<string, number>;
  readonly #unmappedCodes = new Set<string>();
  #cells = 0;

  constructor(spec: GaugeFileSpec, clock: ZoneClock, counts: GaugeFileCounts, notices: FileNotices) {
    this.#spec = spec;
    this.#counts = counts;
    this.#notices = notices;
    this.#clock = clock;
    const dates = spec.dates === "ask" ? "ymd" : spec.dates;
    this.#stamps = new StampScanner({
      ...(dates === undefined ? {} : { dates }),
      dayHour: spec.dayHour === "ask" ? undefined : spec.dayHour,
      snapToMinute: spec.kind !== "tips",
    });
    this.#decimal = spec.decimal ?? "point";
    this.#measuresDepth = spec.kind === "increments" || spec.kind === "intensity";
    this.#traceTexts = new Set(
      this.#measuresDepth ? (spec.trace ?? DEFAULT_TRACE).map((text) => text.trim()) : [],
    );
    this.#mmPerUnit = mmPerUnit(spec);
    this.#missingTexts = new Set(spec.missing.map((text) => text.trim()));
    this.#missingNumbers = new Set(
      spec.missing.map((text) => decimalOf(text)).filter((number) => !Number.isNaN(number)),
    );
    const codes = (list: readonly string[] | undefined, quality: number) =>
      (list ?? []).map((code) => [code.trim(), quality] as const);
    this.#qualityOfCode = new Map([
      ...codes(spec.quality?.use, QUALITY_USE),
      ...codes(spec.quality?.doubt, QUALITY_DOUBT),
      ...codes(spec.quality?.drop, QUALITY_DROP),
      ...codes(spec.quality?.accumulated, QUALITY_USE + ACCUMULATED),
    ]);
  }

  async collect(path: string): Promise<Track[]> {
    if (this.#spec.layout === "waterml2") return this.#collectWaterMl(path);
    let linesAbove: readonly string[] = [];
    let wholeFileId: string | undefined;
    const reader =
      this.#spec.layout === "long" ? this.#longReader(path, () => wholeFileId) : this.#wideReader(path);
    let width = 0;
    const rowsBefore = this.#counts.rows;
    await streamRows(path, this.#spec, {
      above: (lines) => {
        linesAbove = lines;
      },
      header: (cells, line) => {
        width = cells.length;
        wholeFileId = idOfWholeFile(this.#spec, path, linesAbove);
        reader.header(cells, line);
      },
      row: (cells, line) => {
        this.#counts.rows += 1;
        if (this.#hasWidth(cells, width, path, line)) reader.row(cells, line);
      },
      quoteFault: (line, lineCount) => {
        this.#counts.rows += lineCount;
        this.#counts.malformedRows += lineCount;
        this.#notices.tell(
          "rows with a stray quotation mark",
          `a quotation mark is not closed, or closed within a cell: ${
            lineCount === 1 ? "the row is" : `${lineCount} lines from here on are`
          } left out`,
          path,
          [line],
          'write a quotation mark within a cell as ""',
        );
      },
      undecoded: (line, encoding) => {
        this.#counts.rows += 1;
        this.#counts.malformedRows += 1;
        this.#notices.tell(
          "rows with a character that cannot be decoded",
          `the row holds a character that is not ${encoding}: left out`,
          path,
          [line],
          "name the encoding of the file: encoding: windows-1252, say",
        );
      },
    });
    if (this.#counts.rows === rowsBefore) {
      throw new InputError("there is no row under the header", path, "leave the file out or fetch it again");
    }
    return reader.tracks();
  }

  /** The series of a WaterML file: its own units hold, its interpolation types must be what the plan says. */
  async #collectWaterMl(path: string): Promise<Track[]> {
    const tracks: Track[] = [];
    for (const series of await readWaterMl(path)) {
      this.#counts.rows += series.times.length;
      const unfit = whyUnfit(series, this.#spec);
      if (unfit !== undefined) {
        this.#counts.malformedRows += series.times.length;
        this.#notices.tell(
          "series that are left out",
          `the series of "${displayText(series.gaugeId, 60)}" ${unfit.what}: left out`,
          path,
          [series.line],
          unfit.fix,
        );
        continue;
      }
      const track = new Track(path);
      const column = new TrackColumn(series.gaugeId);
      track.columns.push(column);
      const mmPerUom = MM_PER_UOM.get(series.uom) ?? this.#mmPerUnit;
      for (let index = 0; index < series.times.length; index++) {
        const line = series.lines[index];
        if (!this.#pushStamp(track, series.times[index], path, line)) continue;
        const code = series.qualities[index];
        const quality =
          code === "" || this.#spec.quality === undefined ? QUALITY_USE : this.#quality(code, path, line);
        column.push(this.#waterMlValue(series, index, mmPerUom, column, path), quality);
      }
      tracks.push(track);
    }
    this.#boundGauges(tracks.length, path);
    return tracks;
  }

  #waterMlValue(
    series: WaterMlSeries,
    index: number,
    mmPerUom: number,
    column: TrackColumn,
    path: string,
  ): number {
    const reason = series.nilReasons[index];
    if (this.#measuresDepth && /BelowDetection/i.test(reason)) return this.#below();
    if (reason !== "") {
      this.#counts.missing += 1;
      return Number.NaN;
    }
    const text = series.texts[index];
    // XML Schema writes a decimal point, whatever the plan says of tables.
    const number = this.#missingTexts.has(text) ? Number.NaN : decimalOf(text);
    if (this.#missingTexts.has(text) || this.#missingNumbers.has(number)) {
      this.#counts.missing += 1;
      return Number.NaN;
    }
    if (Number.isNaN(number)) {
      this.#counts.unreadableValues += 1;
      this.#notices.tell(
        "values that cannot be read",
        `the value "${displayText(text, 40)}" of gauge "${displayText(series.gaugeId, 60)}" is no number: taken as missing`,
        path,
        [series.lines[index]],
        "fetch the file again, or list it under missing",
      );
      return Number.NaN;
    }
    this.#counts.values += 1;
    column.decimals = Math.max(column.decimals, decimalsOf(text));
    return number * mmPerUom;
  }

  /** @param wholeFileId - the id of the file's one gauge, where the spec says so; known once the header is */
  #longReader(path: string, wholeFileId: () => string | undefined): TrackReader {
    const { columns } = this.#spec;
    const tracks = new Map<string, Track>();
    let gaugeAt = -1;
    let dateAt = -1;
    let timeAt = -1;
    let valueAt = -1;
    let qualityAt = -1;
    return {
      header: (cells) => {
        if (wholeFileId() === undefined) gaugeAt = columnIndex(cells, columns.gauge ?? "", path);
        if (columns.date !== undefined) dateAt = columnIndex(cells, columns.date, path);
        timeAt = columnIndex(cells, columns.time ?? "", path);
        if (columns.value !== undefined) valueAt = columnIndex(cells, columns.value, path);
        if (columns.quality !== undefined) qualityAt = columnIndex(cells, columns.quality, path);
      },
      row: (cells, line) => {
        const id = wholeFileId() ?? cells[gaugeAt];
        if (id === "") {
          this.#counts.malformedRows += 1;
          this.#notices.tell(
            "rows without a gauge",
            "no gauge is named",
            path,
            [line],
            "write the gauge's id",
          );
          return;
        }
        let track = tracks.get(id);
        if (track === undefined) {
          this.#boundGauges(tracks.size + 1, path);
          track = new Track(path);
          track.columns.push(new TrackColumn(id));
          tracks.set(id, track);
        }
        if (!this.#pushStamp(track, stampText(cells, dateAt, timeAt), path, line)) return;
        const quality = qualityAt < 0 ? QUALITY_USE : this.#quality(cells[qualityAt], path, line);
        const column = track.columns[0];
        if (valueAt >= 0) column.push(this.#value(cells[valueAt], column, path, line), quality);
        else {
          this.#counts.values += 1;
          column.push(this.#spec.tipMm ?? Number.NaN, quality);
        }
      },
      tracks: () => [...tracks.values()],
    };
  }

  #wideReader(path: string): TrackReader {
    const { columns } = this.#spec;
    const track = new Track(path);
    const cellOf: number[] = [];
    let dateAt = -1;
    let timeAt = -1;
    let qualityAt = -1;
    return {
      header: (cells, line) => {
        if (columns.date !== undefined) dateAt = columnIndex(cells, columns.date, path);
        timeAt = columnIndex(cells, columns.time ?? "", path);
        if (columns.quality !== undefined) qualityAt = columnIndex(cells, columns.quality, path);
        const ids = new Set<string>();
        for (let at = 0; at < cells.length; at++) {
          if (at === timeAt || at === qualityAt || at === dateAt) continue;
          const id = cells[at];
          if (id === "" || ids.has(id)) {
            // A delimiter at the end of the header line makes a last column of no meaning.
            if (id === "" && at === cells.length - 1) continue;
            this.#notices.tell(
              "columns without a gauge of their own",
              id === ""
                ? `column ${at + 1} has no header: left out`
                : `two columns are headed "${displayText(id, 60)}": the first counts`,
              path,
              [line],
              "head each column with its gauge's id",
            );
            continue;
          }
          ids.add(id);
          cellOf.push(at);
          track.columns.push(new TrackColumn(id));
        }
        this.#boundGauges(ids.size, path);
        if (ids.size === 0) {
          throw new InputError(
            "there is no gauge column",
            path,
            "head a column with a gauge's id, or say layout: long",
          );
        }
      },
      row: (cells, line) => {
        if (!this.#pushStamp(track, stampText(cells, dateAt, timeAt), path, line)) return;
        const quality = qualityAt < 0 ? QUALITY_USE : this.#quality(cells[qualityAt], path, line);
        for (let index = 0; index < cellOf.length; index++) {
          const column = track.columns[index];
          column.push(this.#value(cells[cellOf[index]], column, path, line), quality);
        }
      },
      tracks: () => [track],
    };
  }

  #hasWidth(cells: readonly string[], width: number, path: string, line: number): boolean {
    const right = cells.length === width || (cells.length === width + 1 && cells[width] === "");
    if (right) return true;
    this.#counts.malformedRows += 1;
    this.#notices.tell(
      "rows of another width than the header",
      `the row has ${cells.length} cells, the header ${width}: left out`,
      path,
      [line],
      cells.length > width
        ? "look for decimal commas, or quote cells that hold the delimiter"
        : "look for a row that was cut off",
    );
    return false;
  }

  #boundGauges(count: number, path: string): void {
    if (count <= MAX_GAUGES) return;
    throw new InputError(
      `there are more than ${MAX_GAUGES} gauges`,
      path,
      "check layout and columns.gauge, or split the network",
    );
  }

  /** @returns false where the row has no instant and is left out */
  #pushStamp(track: Track, text: string, path: string, line: number): boolean {
    this.#cells += track.columns.length;
    if (this.#cells > MAX_CELLS) {
      throw new InputError(`there are more than ${MAX_CELLS} readings`, path, "split the files by time");
    }
    const stamps = this.#stamps;
    if (!stamps.scan(text)) {
      this.#counts.unreadableStamps += 1;
      this.#notices.tell(
        "stamps that cannot be read",
        `the stamp "${displayText(text, 40)}" cannot be read (${stamps.problem}): the row is left out`,
        path,
        [line],
        stamps.problem === "no time of day"
          ? "write dayHour, the hour at which the network's days begin, or add the time of day"
          : this.#spec.dates === undefined || this.#spec.dates === "ymd"
            ? "write it like 2031-05-03T12:05, or say in the plan how dates are written (dates)"
            : `check dates: ${this.#spec.dates} in the plan`,
      );
      return false;
    }
    if (stamps.snapped) this.#counts.stampsSnapped += 1;
    if (!Number.isNaN(stamps.offsetMinutes)) {
      const epochMs = stamps.clockMs - stamps.offsetMinutes * 60_000;
      if (this.#clock.offsetMinutesAt(epochMs) !== stamps.offsetMinutes) {
        this.#counts.offsetContradicts += 1;
        if (this.#counts.offsetContradicts === 1) {
          this.#notices.tell(
            "stamps whose offset is not the zone's",
            `the stamp "${displayText(text, 40)}" carries another offset than zone ${this.#spec.zone}: stamps with an offset are taken at their word`,
            path,
            [line],
            "check zone and dst",
          );
        }
      }
      track.pushStamp(epochMs, epochMs, line);
      return true;
    }
    const instants = this.#clock.resolve(stamps.clockMs);
    if (instants > 0) {
      track.pushStamp(this.#clock.earlierMs, this.#clock.laterMs, line);
      return true;
    }
    this.#counts.skippedHour += 1;
    track.uncertain.push({
      startEpochMs: this.#clock.earlierMs - 1,
      endEpochMs: this.#clock.laterMs,
    });
    this.#notices.tell(
      "stamps in an hour that the clock skipped",
      `the stamp "${displayText(text, 40)}" does not exist in zone ${this.#spec.zone}, whose clock skipped it: the row is left out`,
      path,
      [line],
      "check zone, or say dst: never if the logger's clock is not changed",
    );
    return false;
  }

  #value(cell: string, column: TrackColumn, path: string, line: number): number {
    if (this.#missingTexts.has(cell)) {
      this.#counts.missing += 1;
      return Number.NaN;
    }
    if (this.#traceTexts.has(cell)) {
      this.#counts.values += 1;
      this.#counts.traces += 1;
      return 0;
    }
    if (this.#measuresDepth && !Number.isNaN(belowOf(cell, this.#decimal))) return this.#below();
    const number = decimalOf(cell, this.#decimal);
    if (Number.isNaN(number)) {
      this.#counts.unreadableValues += 1;
      this.#notices.tell(
        "values that cannot be read",
        `the value "${displayText(cell, 40)}" of gauge "${displayText(column.id, 60)}" ${whyNoNumber(cell, this.#decimal)}: taken as missing`,
        path,
        [line],
        this.#decimal === "point"
          ? "write it like 0.2, or list it under missing"
          : "write it like 0,2, or list it under missing",
      );
      return Number.NaN;
    }
    if (this.#missingNumbers.has(number)) {
      this.#counts.missing += 1;
      return Number.NaN;
    }
    this.#counts.values += 1;
    const decimals = decimalsOf(cell, this.#decimal);
    if (decimals > column.decimals) column.decimals = decimals;
    return number * this.#mmPerUnit;
  }

  /** A value below what the gauge can tell. */
  #below(): number {
    this.#counts.belowDetection += 1;
    if (this.#spec.below === "missing") {
      this.#counts.missing += 1;
      return Number.NaN;
    }
    this.#counts.values += 1;
    return 0;
  }

  #quality(code: string, path: string, line: number): number {
    let quality = this.#qualityOfCode.get(code);
    if (quality === undefined) {
      quality = QUALITY_DOUBT;
      this.#counts.qualityUnmapped += 1;
      if (!this.#unmappedCodes.has(code)) {
        this.#unmappedCodes.add(code);
        this.#notices.tell(
          "quality codes without a meaning",
          `the quality code "${displayText(code, 40)}" has no meaning in the plan: readings with it are doubted`,
          path,
          [line],
          "list it under quality.use, quality.doubt or quality.drop",
        );
      }
    }
    if (quality === QUALITY_DOUBT) this.#counts.qualityDoubt += 1;
    if (quality === QUALITY_DROP) this.#counts.qualityDrop += 1;
    return quality;
  }
}

/** UCUM codes of depths and rates of rain. */
const MM_PER_UOM: ReadonlyMap<string, number> = new Map([
  ["mm", 1],
  ["cm", 10],
  ["[in_i]", MM_PER_INCH],
  ["in", MM_PER_INCH],
  ["mm/h", 1],
  ["mm h-1", 1],
  ["[in_i]/h", MM_PER_INCH],
  ["in/h", MM_PER_INCH],
]);
const NOT_RAIN = /evapo|transpir|snow|level|stage|discharge|runoff|humid|soil|temperature|wind/i;

/** Why a series cannot be read as the plan says. */
function whyUnfit(series: WaterMlSeries, spec: GaugeFileSpec): { what: string; fix: string } | undefined {
  if (NOT_RAIN.test(series.property)) {
    return { what: `observes "${displayText(series.property, 80)}"`, fix: "nothing, if that is no rain" };
  }
  if (series.uom !== "") {
    const isRate = series.uom.endsWith("/h") || series.uom.endsWith("h-1");
    if (!MM_PER_UOM.has(series.uom) || isRate !== (spec.kind === "intensity")) {
      return {
        what: `is in "${displayText(series.uom, 40)}", which does not go with kind: ${spec.kind}`,
        fix: "check kind, or fetch it in mm",
      };
    }
  }
  const { interpolation } = series;
  if (interpolation === undefined || spec.kind === "tips" || spec.kind === "counter") return undefined;
  const wanted = `${spec.stamp === "end" ? "preceding" : "succeeding"}-${spec.kind === "intensity" ? "average" : "total"}`;
  if (interpolation === wanted) return undefined;
  return {
    what: `holds values of the type ${interpolation}, where stamp: ${spec.stamp} and kind: ${spec.kind} would be ${wanted}`,
    fix: "check stamp and kind in the plan; other types are no depths",
  };
}

/** The stamp of a row; of two columns, the date and the time of day with a blank between them. */
function stampText(cells: readonly string[], dateAt: number, timeAt: number): string {
  return dateAt < 0 ? cells[timeAt] : `${cells[dateAt]} ${cells[timeAt]}`;
}

interface TrackReader extends Pick<RowHandler, "header" | "row"> {
  tracks(): Track[];
}
