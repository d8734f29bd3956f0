import { basename } from "node:path";
import { type GaugeSeries, InputError, type Notice } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import type { GaugeFileSpec } from "./gauge-file-spec.ts";
import { type GaugeFileOptions, readGaugeFile, readGaugeFiles } from "./read-gauge-files.ts";

const folder = scratchFolder();
let files = 0;

const LONG: GaugeFileSpec = {
  network: "moor",
  layout: "long",
  columns: { gauge: "gauge", time: "time", value: "value" },
  kind: "increments",
  unit: "mm",
  stamp: "end",
  zone: "UTC",
  dst: "follow",
  silence: "missing",
  missing: ["", "NaN", "-999"],
};
const WIDE: GaugeFileSpec = { ...LONG, layout: "wide", columns: { time: "time" } };

interface Outcome {
  readonly series: readonly GaugeSeries[];
  readonly counts: Awaited<ReturnType<typeof readGaugeFile>>["counts"];
  readonly lines: readonly string[];
}

async function read(text: string, spec: Partial<GaugeFileSpec> = {}, options: GaugeFileOptions = {}) {
  files += 1;
  return readPaths([folder.write(`gauges-${files}.csv`, text)], { ...LONG, ...spec }, options);
}

async function readPaths(
  paths: readonly string[],
  spec: GaugeFileSpec,
  options: GaugeFileOptions = {},
): Promise<Outcome> {
  const notices: Notice[] = [];
  const { series, counts } = await readGaugeFiles(paths, spec, (notice) => notices.push(notice), options);
  const lines = notices.map(
    ({ what, where, fix }) => `${basename(where).replace(/-\d+\.csv/, "")}: ${what}; ${fix}`,
  );
  return { series, counts, lines };
}

/** Readings of the only gauge as "(start, end] depth", on the day of the tests. */
function readings(series: readonly GaugeSeries[], id = series[0].id): string[] {
  const gauge = series.find((candidate) => candidate.id === id)!;
  return Array.from(
    gauge.depthMm,
    (depth, index) =>
      `(${clock(gauge.startEpochMs[index])}, ${clock(gauge.endEpochMs[index])}] ${Number(depth.toFixed(6))}`,
  );
}

function clock(epochMs: number): string {
  return new Date(epochMs)
    .toISOString()
    .replace(/^2031-05-03T/, "")
    .replace(":00.000Z", "")
    .replace("Z", "");
}

const lines = (...rows: string[]) => `${rows.join("\n")}\n`;

describe("long files", () => {
  test("a reading covers the step that ends at its stamp; ids stay text", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "007,2031-05-03T12:05Z,0.2",
        "007,2031-05-03T12:10Z,0",
        "NO,2031-05-03T12:05Z,1.4",
        "NO,2031-05-03T12:10Z,0.6",
        "12:30,2031-05-03T12:05Z,0",
        "12:30,2031-05-03T12:10Z,0.2",
      ),
    );
    expect(series.map(({ id }) => id)).toEqual(["007", "12:30", "NO"]);
    expect(readings(series, "007")).toEqual(["(12:00, 12:05] 0.2", "(12:05, 12:10] 0"]);
    expect(readings(series, "NO")).toEqual(["(12:00, 12:05] 1.4", "(12:05, 12:10] 0.6"]);
    expect(series[0]).toMatchObject({ network: "moor", stepMs: 300_000, resolutionMm: 0.1 });
    expect(counts).toMatchObject({ rows: 6, values: 6, gauges: 3, files: 1 });
    expect(told).toEqual([]);
  });

  // The published case: an hourly value stamped 12:00 at its end, and five-minute scans stamped at their start.
  test("an hour stamped at its end holds the scans that h-interval-ending says", async () => {
    const { inputs, expected } = checkValue("h-interval-ending");
    const { series } = await read(lines("gauge,time,value", `A,2031-05-03 ${inputs.gauge_stamp},3`), {
      stepMinutes: 60,
    });
    const inside = (inputs.radar_stamps_start as string[]).map((start) => {
      const startMs = Date.parse(`2031-05-03T${start}Z`);
      return startMs >= series[0].startEpochMs[0] && startMs + 300_000 <= series[0].endEpochMs[0];
    });
    expect(inside).toEqual(expected);
  });

  test("a stamp at the start of the step, inches, semicolons, BOM and CRLF", async () => {
    const text = '\ufeffid;when;depth\r\n"A ""1""";2031-05-03 12:00;0.1\r\n"A ""1""";2031-05-03 12:10;0\r\n';
    const { series, lines: told } = await read(text, {
      columns: { gauge: "id", time: "when", value: "depth" },
      unit: "in",
      stamp: "start",
    });
    expect(series[0].id).toBe('A "1"');
    // 1 in is 25.4 mm exactly (international yard and pound agreement, 1959).
    expect(readings(series)).toEqual(["(12:00, 12:10] 2.54", "(12:10, 12:20] 0"]);
    expect(told).toEqual([]);
  });

  test("tabs part cells too, and lines without text are no rows", async () => {
    const { series, counts } = await read(
      lines("gauge\ttime\tvalue", "", "A\t2031-05-03T12:05\t0.2", "", "A\t2031-05-03T12:10\t0.4", ""),
    );
    expect(readings(series)).toEqual(["(12:00, 12:05] 0.2", "(12:05, 12:10] 0.4"]);
    expect(counts.rows).toBe(2);
  });

  test("intensities become depths over their step", async () => {
    const { series } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:05,12", "A,2031-05-03T12:10,2"),
      { kind: "intensity", unit: "mm/h" },
    );
    // 12 mm/h for 5 min is 1 mm.
    expect(readings(series)).toEqual(["(12:00, 12:05] 1", "(12:05, 12:10] 0.166667"]);
    const { series: inches } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:05,12", "A,2031-05-03T12:10,0"),
      { kind: "intensity", unit: "in/h" },
    );
    expect(readings(inches)[0]).toBe("(12:00, 12:05] 25.4");
  });

  test("a missing value is NaN and never 0, however it is written", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:05,",
        "A,2031-05-03T12:10,NaN",
        "A,2031-05-03T12:15,-999.0",
        "A,2031-05-03T12:20,0.2",
      ),
    );
    expect(readings(series)).toEqual([
      "(12:00, 12:05] NaN",
      "(12:05, 12:10] NaN",
      "(12:10, 12:15] NaN",
      "(12:15, 12:20] 0.2",
    ]);
    expect(counts).toMatchObject({ missing: 3, values: 1 });
    expect(told).toEqual([]);
  });

  test("an empty cell is no 0 even where the plan does not list it as missing", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(lines("gauge,time,value", "A,2031-05-03T12:05,", "A,2031-05-03T12:10,0"), {
      missing: ["-999"],
    });
    expect(readings(series)).toEqual(["(12:00, 12:05] NaN", "(12:05, 12:10] 0"]);
    expect(counts.unreadableValues).toBe(1);
    expect(told[0]).toMatch(/^gauges, line 2: the value "" of gauge "A" is no number: taken as missing;/);
  });

  test("a reading after a hole covers its own step only", async () => {
    const { series } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:05,0", "A,2031-05-03T12:10,0", "A,2031-05-03T12:40,1"),
    );
    expect(readings(series)[2]).toBe("(12:35, 12:40] 1");
  });
});

describe("faults are named by file and line, and the rest goes on", () => {
  test("values that cannot be", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:05,-0.2",
        "A,2031-05-03T12:10,250",
        "A,2031-05-03T12:15,250.1",
        "A,2031-05-03T12:20,0.2",
      ),
    );
    expect(readings(series).map((reading) => reading.split("] ")[1])).toEqual(["NaN", "250", "NaN", "0.2"]);
    expect(counts.impossible).toBe(2);
    expect(told).toEqual([
      'gauges, line 2: gauge "A" reads -0.2 mm: rain is never negative; check unit and kind, or list the value under missing',
      'gauges, line 4: gauge "A" reads 250.1 mm, more than 50 mm in a minute; check unit and kind, or list the value under missing',
    ]);
  });

  test("cells that cannot be read: ten by line, the rest as a count", async () => {
    const rows = Array.from({ length: 14 }, (_, index) => `A;2031-05-03T12:${10 + index};0,${index + 1}`);
    const { counts, lines: told } = await read(lines("gauge;time;value", ...rows));
    expect(counts.unreadableValues).toBe(14);
    expect(told).toHaveLength(11);
    expect(told[0]).toBe(
      'gauges, line 2: the value "0,1" of gauge "A" has a decimal comma: taken as missing; write it like 0.2, or list it under missing',
    );
    expect(told[10]).toBe(
      "gauges: 4 more values that cannot be read; write it like 0.2, or list it under missing",
    );
  });

  test("a decimal comma in a file parted by commas makes a row too wide", async () => {
    const { counts, lines: told } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:05,0,2", "A,2031-05-03T12:10", "A,2031-05-03T12:15,0.2"),
      { stepMinutes: 5 },
    );
    expect(counts).toMatchObject({ malformedRows: 2, values: 1 });
    expect(told).toEqual([
      "gauges, line 2: the row has 4 cells, the header 3: left out; look for decimal commas, or quote cells that hold the delimiter",
      "gauges, line 3: the row has 2 cells, the header 3: left out; look for a row that was cut off",
    ]);
  });

  test("stamps that cannot be read, day and month among them", async () => {
    const { counts, lines: told } = await read(
      lines(
        "gauge,time,value",
        "A,03/05/2031 12:05,0.2",
        "A,soon\u001b[31m,0.2",
        "A,2031-05-03T12:05,0.2",
        "A,2031-05-03T12:10,0.2",
      ),
    );
    expect(counts.unreadableStamps).toBe(2);
    expect(told).toEqual([
      'gauges, line 2: the stamp "03/05/2031 12:05" cannot be read (day and month can be mistaken for each other): the row is left out; write it like 2031-05-03T12:05, or say in the plan how dates are written (dates)',
      'gauges, line 3: the stamp "soon[31m" cannot be read (not a time like 2031-05-03T12:05): the row is left out; write it like 2031-05-03T12:05, or say in the plan how dates are written (dates)',
    ]);
  });

  test("a row given twice counts once; two values for one time are named with both lines", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:05,0.2",
        "A,2031-05-03T12:05,0.2",
        "A,2031-05-03T12:10,0.4",
        "A,2031-05-03T12:10,4.0",
        "A,2031-05-03T12:15,NaN",
        "A,2031-05-03T12:15,1.0",
      ),
    );
    expect(readings(series)).toEqual(["(12:00, 12:05] 0.2", "(12:05, 12:10] 0.4", "(12:10, 12:15] 1"]);
    expect(counts).toMatchObject({ duplicatesSame: 1, duplicatesDifferent: 2 });
    expect(told).toEqual([
      'gauges, lines 4 and 5: two readings of gauge "A" at 2031-05-03T12:10Z differ: the first counts; delete the wrong one',
      'gauges, lines 6 and 7: two readings of gauge "A" at 2031-05-03T12:15Z differ: the first is missing, so the second counts; delete the wrong one',
    ]);
  });

  test("rows out of order are sorted and named; newest first is an order too", async () => {
    const rows = [
      "A,2031-05-03T12:05,1",
      "A,2031-05-03T12:15,3",
      "A,2031-05-03T12:10,2",
      "A,2031-05-03T12:20,4",
    ];
    const sorted = ["(12:00, 12:05] 1", "(12:05, 12:10] 2", "(12:10, 12:15] 3", "(12:15, 12:20] 4"];
    const mixed = await read(lines("gauge,time,value", ...rows));
    expect(readings(mixed.series)).toEqual(sorted);
    expect(mixed.counts.outOfOrder).toBe(1);
    expect(mixed.lines).toEqual([
      "gauges, line 4: this row is earlier than the one before; nothing to do: the rows were sorted",
    ]);
    const newestFirst = await read(lines("gauge,time,value", ...rows.toSorted().reverse()));
    expect(readings(newestFirst.series)).toEqual(sorted);
    expect(newestFirst.counts.outOfOrder).toBe(0);
  });

  test("rows without a gauge, and lines counted through quoted line ends", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        ",2031-05-03T12:05,0.2",
        '"two\nlines",2031-05-03T12:05,0.2',
        '"two\nlines",2031-05-03T12:10,wet',
      ),
    );
    expect(series.map(({ id }) => id)).toEqual(["two\nlines"]);
    expect(counts.malformedRows).toBe(1);
    expect(told.map((line) => line.split(":")[0])).toEqual(["gauges, line 2", "gauges, line 5"]);
    expect(told[1]).toContain('the value "wet" of gauge "two lines" is no number');
  });

  test("a stray quotation mark swallows what follows, and every line of it is counted", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:05,1",
        "A,2031-05-03T12:10,1",
        '"A"B,2031-05-03T12:15,1',
        "A,2031-05-03T12:20,1",
      ),
    );
    expect(readings(series)).toEqual(["(12:00, 12:05] 1", "(12:05, 12:10] 1"]);
    expect(counts).toMatchObject({ rows: 4, malformedRows: 2 });
    expect(told).toEqual([
      'gauges, line 4: a quotation mark is not closed, or closed within a cell: 2 lines from here on are left out; write a quotation mark within a cell as ""',
    ]);
  });

  test("a stamp with an offset is taken at its word, and a contradiction is said once", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T14:05+02:00,0.2",
        "A,2031-05-03T12:10Z,0.4",
        "A,2031-05-03T12:15Z,0.6",
        "A,2031-05-03T14:20,0.8",
      ),
      { zone: "Europe/Zurich" },
    );
    expect(readings(series)).toEqual([
      "(12:00, 12:05] 0.2",
      "(12:05, 12:10] 0.4",
      "(12:10, 12:15] 0.6",
      "(12:15, 12:20] 0.8",
    ]);
    expect(counts.offsetContradicts).toBe(2);
    expect(told).toEqual([
      'gauges, line 3: the stamp "2031-05-03T12:10Z" carries another offset than zone Europe/Zurich: stamps with an offset are taken at their word; check zone and dst',
    ]);
  });

  test("quality codes become use, doubt or drop; one without a meaning is doubted and named once", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value,qc",
        "A,2031-05-03T12:05,0.2,G",
        "A,2031-05-03T12:10,0.2,S",
        "A,2031-05-03T12:15,0.2,B",
        "A,2031-05-03T12:20,0.2,?",
        "A,2031-05-03T12:25,0.2,?",
      ),
      {
        columns: { ...LONG.columns, quality: "qc" },
        quality: { use: ["G"], doubt: ["S"], drop: ["B"] },
      },
    );
    expect([...series[0].quality]).toEqual([0, 1, 2, 1, 1]);
    expect(counts).toMatchObject({ qualityDoubt: 3, qualityDrop: 1, qualityUnmapped: 2 });
    expect(told).toEqual([
      'gauges, line 5: the quality code "?" has no meaning in the plan: readings with it are doubted; list it under quality.use, quality.doubt or quality.drop',
    ]);
  });

  test("readings closer than their step are cut short and counted, and the plan's step is questioned", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:10,1", "A,2031-05-03T12:15,1", "A,2031-05-03T12:20,1"),
      { stepMinutes: 10 },
    );
    expect(readings(series)).toEqual(["(12:00, 12:10] 1", "(12:10, 12:15] 1", "(12:15, 12:20] 1"]);
    expect(counts.overlapping).toBe(2);
    expect(told).toEqual([
      'gauges, line 2: gauge "A" has stamps 5 minutes apart where stepMinutes is 10; check stepMinutes and kind',
    ]);
  });

  test("a gauge with one stamp and no step given is left out, since nobody knows what it covers", async () => {
    const { series, counts, lines: told } = await read(lines("gauge,time,value", "A,2031-05-03T12:10,1"));
    expect(series[0].depthMm).toHaveLength(0);
    expect(counts.stepUnknown).toBe(1);
    expect(told[0]).toMatch(/^gauges, line 2: gauge "A" has one stamp only/);
  });
});

describe("files that cannot be read at all", () => {
  test.each([
    ["", {}, "the file is empty"],
    ["gauge,time,value\n", {}, "there is no row under the header"],
    ["gauge\nA\n", {}, "the header holds only one column"],
    ["gauge,Time,value\nA,2031-05-03T12:05,1\n", {}, 'there is no column "time"'],
    ["\ufffe", {}, undefined],
    ["time\n", WIDE, "the header holds only one column"],
  ] as const)("%j: %o", async (text, spec, what) => {
    const fault = await read(text, spec).catch((thrown: unknown) => thrown);
    expect(fault).toBeInstanceOf(InputError);
    if (what !== undefined) expect((fault as InputError).what).toBe(what);
  });

  test("the message names the column as the file has it", async () => {
    await expect(read("gauge,Time,value\nA,2031-05-03T12:05,1\n")).rejects.toMatchObject({
      fix: 'name it as the file does, "Time"',
    });
  });

  test("a mark of another encoding than planned, binary and absent files", async () => {
    const utf16 = folder.write("utf16.csv", Buffer.from("\ufeffgauge,time,value\n", "utf16le"));
    const binary = folder.write("binary.csv", new Uint8Array([0x89, 0x48, 0x44, 0x46, 0, 1]));
    const read1 = (path: string) => readGaugeFile(path, LONG, () => {});
    await expect(readGaugeFile(utf16, { ...LONG, encoding: "utf-8" }, () => {})).rejects.toMatchObject({
      what: "the text is utf-16le by its byte order mark, not utf-8",
      where: utf16,
      kind: "input",
    });
    await expect(read1(binary)).rejects.toMatchObject({ what: "this is not a text file" });
    await expect(read1(`${folder.path}/absent.csv`)).rejects.toMatchObject({
      what: "the file cannot be opened",
    });
  });

  test.each([
    [{ kind: "tips", unit: "tips" }, "the depth of one tip is not known"],
    [{ kind: "intensity", unit: "mm" }, "intensity cannot be in mm"],
    [{ kind: "increments", unit: "mm/h" }, "increments cannot be in mm/h"],
    [{ layout: "wide", kind: "tips", tipMm: 0.2 }, "tips cannot stand in a wide table"],
    [{ columns: { time: "time", value: "value" } }, "the long layout needs a gauge column"],
    [{ columns: { gauge: "gauge", time: "time" } }, "the long layout needs a value column"],
    [{ silence: "heartbeat soon" }, '"heartbeat soon" is no rule for silence'],
    [{ zone: "Middle/Earth" }, '"Middle/Earth" is no time zone'],
  ] as const)("a spec that contradicts itself is wrong usage: %o", async (spec, what) => {
    await expect(read(lines("gauge,time,value", "A,2031-05-03T12:05,1"), spec)).rejects.toMatchObject({
      what,
      kind: "usage",
    });
  });
});

describe("wide files", () => {
  test("one column per gauge; a quality code holds for its row", async () => {
    const { series, counts } = await read(
      lines("time,007,NO,qc,", "2031-05-03T12:10,0.2,,ok,", "2031-05-03T12:20,-999,1.2,odd,"),
      {
        ...WIDE,
        columns: { time: "time", quality: "qc" },
        quality: { use: ["ok"], doubt: ["odd"], drop: [] },
      },
    );
    expect(series.map(({ id }) => id)).toEqual(["007", "NO"]);
    expect(readings(series, "007")).toEqual(["(12:00, 12:10] 0.2", "(12:10, 12:20] NaN"]);
    expect(readings(series, "NO")).toEqual(["(12:00, 12:10] NaN", "(12:10, 12:20] 1.2"]);
    expect([...series[0].quality]).toEqual([0, 1]);
    expect(counts).toMatchObject({ rows: 2, values: 2, missing: 2, gauges: 2 });
  });

  test("columns without a header or with another's are left out and said", async () => {
    const { series, lines: told } = await read(
      lines("time,A,,A", "2031-05-03T12:10,1,2,3", "2031-05-03T12:20,1,2,3"),
      WIDE,
    );
    expect(readings(series)).toEqual(["(12:00, 12:10] 1", "(12:10, 12:20] 1"]);
    expect(told).toEqual([
      "gauges, line 1: column 3 has no header: left out; head each column with its gauge's id",
      'gauges, line 1: two columns are headed "A": the first counts; head each column with its gauge\'s id',
    ]);
  });
});

describe("several files of one network", () => {
  test("a gauge goes on from file to file, and a differing row is named with both files", async () => {
    const a = folder.write(
      "may.csv",
      lines("gauge,time,value", "A,2031-05-03T12:05,1", "A,2031-05-03T12:10,2"),
    );
    const b = folder.write(
      "june.csv",
      lines("gauge,time,value", "A,2031-05-03T12:10,9", "A,2031-05-03T12:15,3"),
    );
    const { series, counts, lines: told } = await readPaths([a, b], LONG);
    expect(readings(series)).toEqual(["(12:00, 12:05] 1", "(12:05, 12:10] 2", "(12:10, 12:15] 3"]);
    expect(counts).toMatchObject({ files: 2, gauges: 1, duplicatesDifferent: 1, outOfOrder: 0 });
    expect(told[0]).toContain("june.csv, line 2: two readings of gauge");
    const notices: Notice[] = [];
    const { series: reversed } = await readGaugeFiles([b, a], LONG, (notice) => notices.push(notice));
    expect(readings(reversed)[1]).toBe("(12:05, 12:10] 9");
    expect(notices[0].where).toBe(`${b}, line 2 and ${a}, line 3`);
  });

  test("a counter goes on over the border between files", async () => {
    const a = folder.write(
      "c1.csv",
      lines("gauge,time,value", "A,2031-05-03T12:00,10", "A,2031-05-03T12:05,10.2"),
    );
    const b = folder.write(
      "c2.csv",
      lines("gauge,time,value", "A,2031-05-03T12:10,10.6", "A,2031-05-03T12:15,10.6"),
    );
    const { series } = await readPaths([b, a], { ...LONG, kind: "counter" });
    expect(readings(series)).toEqual(["(12:00, 12:05] 0.2", "(12:05, 12:10] 0.4", "(12:10, 12:15] 0"]);
  });
});

describe("counters", () => {
  test("missing levels, resets and jitter, told and counted", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:00,12.4",
        "A,2031-05-03T12:10,12.6",
        "A,2031-05-03T12:20,-999",
        "A,2031-05-03T12:30,13.0",
        "A,2031-05-03T12:40,12.8",
        "A,2031-05-03T12:50,0.2",
        "A,2031-05-03T13:00,0.6",
      ),
      { kind: "counter" },
    );
    // Counted by hand: +0.2, 0.4 over the gap, 0, reset 0.2, +0.4.
    expect(readings(series)).toEqual([
      "(12:00, 12:10] 0.2",
      "(12:10, 12:30] 0.4",
      "(12:30, 12:40] 0",
      "(12:40, 12:50] 0.2",
      "(12:50, 13:00] 0.4",
    ]);
    expect(counts).toMatchObject({ missing: 1, counterResets: 1, counterJitter: 1, counterGapTotals: 1 });
    expect(told).toEqual([
      'gauges, line 7: gauge "A" starts again at 0.2 mm: that much is counted, a lower bound; nothing to do if the counter was reset',
    ]);
  });

  test("a counter of tips that rolls over", async () => {
    const { series, counts } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:00,998", "A,2031-05-03T12:10,3"),
      { kind: "counter", unit: "tips", tipMm: 0.2, counterRollsOverAt: 1000 },
    );
    expect(readings(series)).toEqual(["(12:00, 12:10] 1"]);
    expect(counts).toMatchObject({ counterRollovers: 1, counterResets: 0 });
    expect(series[0].resolutionMm).toBe(0.2);
  });

  test("a counter that reports on change was dry until just before its stamp", async () => {
    const { series } = await read(
      lines("gauge,time,value", "A,2031-05-03T12:00,5", "A,2031-05-03T13:00,5.2"),
      { kind: "counter", silence: "dry", stepMinutes: 5 },
    );
    expect(readings(series)).toEqual(["(12:00, 12:55] 0", "(12:55, 13:00] 0.2"]);
    expect(series[0].stepMs).toBeUndefined();
  });

  test("levels that the network drops are passed over", async () => {
    const { series } = await read(
      lines(
        "gauge,time,value,qc",
        "A,2031-05-03T12:00,5,",
        "A,2031-05-03T12:10,95,x",
        "A,2031-05-03T12:20,5.4,",
      ),
      {
        kind: "counter",
        columns: { ...LONG.columns, quality: "qc" },
        quality: { use: [""], doubt: [], drop: ["x"] },
      },
    );
    expect(readings(series)).toEqual(["(12:00, 12:20] 0.4"]);
  });

  test("an outlier and a jump are told, and no rain comes of them", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:00,150",
        "A,2031-05-03T12:05,0",
        "A,2031-05-03T12:10,150.2",
        "A,2031-05-03T12:15,900",
        "A,2031-05-03T12:20,900.2",
      ),
      { kind: "counter" },
    );
    expect(readings(series)).toEqual(["(12:00, 12:10] 0.2", "(12:10, 12:15] NaN", "(12:15, 12:20] 0.2"]);
    expect(counts).toMatchObject({ counterOutliers: 1, impossible: 1 });
    expect(told).toEqual([
      'gauges, line 3: gauge "A" reads 0 mm, which the next reading does not bear out: left out; check the counter',
      'gauges, line 5: gauge "A" moves to 900 mm, more than 50 mm in a minute: not observed; check the counter and the unit',
    ]);
  });
});

describe("tips and silence", () => {
  const TIPS: Partial<GaugeFileSpec> = {
    kind: "tips",
    columns: { gauge: "gauge", time: "time" },
    tipMm: 0.2,
    silence: "dry",
  };
  const window = { startEpochMs: Date.UTC(2031, 4, 3, 12), endEpochMs: Date.UTC(2031, 4, 3, 13) };

  test("a tip on a border belongs to the interval that ends there; silence is dry over the window", async () => {
    const { series, counts } = await read(
      lines("gauge,time", "A,2031-05-03T12:05:00Z", "A,2031-05-03T12:05:01.5Z", "A,2031-05-03T12:30Z"),
      TIPS,
      { window },
    );
    expect(readings(series)).toEqual([
      "(12:00, 12:04:59.999] 0",
      "(12:04:59.999, 12:05] 0.2",
      "(12:05, 12:05:01.499] 0",
      "(12:05:01.499, 12:05:01.500] 0.2",
      "(12:05:01.500, 12:29:59.999] 0",
      "(12:29:59.999, 12:30] 0.2",
      "(12:30, 13:00] 0",
    ]);
    expect(series[0].stepMs).toBeUndefined();
    expect(series[0].resolutionMm).toBe(0.2);
    expect(counts.silentDryHours).toBeCloseTo(1, 5);
  });

  test("without a window, the span of the file is filled", async () => {
    const { series } = await read(lines("gauge,time", "A,2031-05-03T12:05Z", "B,2031-05-03T12:30Z"), TIPS);
    expect(readings(series, "A")).toEqual(["(12:04:59.999, 12:05] 0.2", "(12:05, 12:30] 0"]);
    expect(readings(series, "B")).toEqual(["(12:05, 12:29:59.999] 0", "(12:29:59.999, 12:30] 0.2"]);
  });

  test("a window that goes on after the last row is said to be dry there", async () => {
    const { lines: told } = await read(lines("gauge,time", "A,2031-05-03T12:05Z"), TIPS, {
      window: { ...window, endEpochMs: Date.UTC(2031, 4, 3, 18) },
    });
    expect(told).toEqual([
      'gauges: no row of network "moor" is later than 2031-05-03T12:05Z; the rest of the window counts as dry, since silence is dry; end the window there, or fetch the newer rows',
    ]);
  });

  test("missing: nothing is known between the tips", async () => {
    const { series } = await read(lines("gauge,time", "A,2031-05-03T12:05Z", "A,2031-05-03T12:30Z"), {
      ...TIPS,
      silence: "missing",
    });
    expect(readings(series)).toEqual(["(12:04:59.999, 12:05] 0.2", "(12:29:59.999, 12:30] 0.2"]);
  });

  test("heartbeat: dry for so long after a row, and not before the first", async () => {
    const { series } = await read(
      lines("gauge,time", "A,2031-05-03T12:05Z", "A,2031-05-03T12:15Z", "A,2031-05-03T12:50Z"),
      { ...TIPS, silence: "heartbeat PT20M" },
      { window },
    );
    expect(readings(series)).toEqual([
      "(12:04:59.999, 12:05] 0.2",
      "(12:05, 12:14:59.999] 0",
      "(12:14:59.999, 12:15] 0.2",
      "(12:15, 12:35] 0",
      "(12:49:59.999, 12:50] 0.2",
      "(12:50, 13:00] 0",
    ]);
  });

  test("counts of tips, a depth column, and what cannot be read leaves the time before it unobserved", async () => {
    const { series, counts } = await read(
      lines("gauge,time,n", "A,2031-05-03T12:10Z,3", "A,2031-05-03T12:20Z,?", "A,2031-05-03T12:30Z,0"),
      { ...TIPS, unit: "tips", columns: { gauge: "gauge", time: "time", value: "n" } },
      { window },
    );
    expect(readings(series)).toEqual([
      "(12:00, 12:09:59.999] 0",
      "(12:09:59.999, 12:10] 0.6",
      "(12:10, 12:20] NaN",
      "(12:20, 12:29:59.999] 0",
      "(12:29:59.999, 12:30] 0",
      "(12:30, 13:00] 0",
    ]);
    expect(counts.unreadableValues).toBe(1);
  });

  test("two tips with one stamp count once, and the message says what that may mean", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(
      lines("gauge,time", "A,2031-05-03T12:05Z", "A,2031-05-03T12:05Z", "A,2031-05-03T12:06Z"),
      TIPS,
    );
    expect(series[0].depthMm.reduce((sum, depth) => sum + depth, 0)).toBeCloseTo(0.4, 12);
    expect(counts.duplicatesSame).toBe(1);
    expect(told).toEqual([
      "gauges: 1 tips have the gauge and stamp of another and count once; if the logger writes whole minutes, give the number of tips in a minute instead",
    ]);
  });

  test("increments that are only written when it rains", async () => {
    const { series } = await read(
      lines(
        "gauge,time,value",
        "A,2031-05-03T12:05,0.2",
        "A,2031-05-03T12:10,-999",
        "A,2031-05-03T12:30,0.4",
      ),
      { silence: "dry", stepMinutes: 5 },
      { window: { ...window, endEpochMs: Date.UTC(2031, 4, 3, 12, 40) } },
    );
    expect(readings(series)).toEqual([
      "(12:00, 12:05] 0.2",
      "(12:05, 12:10] NaN",
      "(12:10, 12:25] 0",
      "(12:25, 12:30] 0.4",
      "(12:30, 12:40] 0",
    ]);
  });
});

describe("hours that the clock repeats or skips (IANA: Europe/Zurich 2024-10-27 and 2024-03-31)", () => {
  const zurich: Partial<GaugeFileSpec> = { zone: "Europe/Zurich" };
  const local = (day: string, ...times: string[]) =>
    lines("gauge,time,value", ...times.map((time, index) => `A,${day} ${time},${index + 1}`));
  const ends = (series: readonly GaugeSeries[]) =>
    Array.from(series[0].endEpochMs, (end) => new Date(end).toISOString().slice(8, 16));

  test("half-hourly rows: the clock is seen to go back once", async () => {
    const text = local("2024-10-27", "01:30", "02:00", "02:30", "02:00", "02:30", "03:00");
    const { series, counts, lines: told } = await read(text, zurich);
    expect(ends(series)).toEqual(["26T23:30", "27T00:00", "27T00:30", "27T01:00", "27T01:30", "27T02:00"]);
    expect([...series[0].depthMm]).toEqual([1, 2, 3, 4, 5, 6]);
    expect(counts).toMatchObject({ repeatedHourResolved: 4, repeatedHourLeftOut: 0, outOfOrder: 0 });
    expect(told).toEqual([]);
  });

  test("newest first, likewise", async () => {
    const text = local("2024-10-27", "03:00", "02:30", "02:00", "02:30", "02:00", "01:30");
    const { series, counts } = await read(text, zurich);
    expect([...series[0].depthMm]).toEqual([6, 5, 4, 3, 2, 1]);
    expect(counts).toMatchObject({ repeatedHourResolved: 4, outOfOrder: 0 });
  });

  test("hourly rows: the same stamp twice running", async () => {
    const { series } = await read(local("2024-10-27", "00:00", "01:00", "02:00", "02:00", "03:00"), zurich);
    expect(ends(series)).toEqual(["26T22:00", "26T23:00", "27T00:00", "27T01:00", "27T02:00"]);
    expect([...series[0].depthMm]).toEqual([1, 2, 3, 4, 5]);
  });

  test("at shorter steps, the same stamp twice is no clock going back", async () => {
    const text = local("2024-10-27", "01:30", "01:45", "02:00", "02:15", "02:15", "02:30", "03:00", "03:15");
    const { counts } = await read(text, zurich);
    expect(counts).toMatchObject({ repeatedHourResolved: 0, repeatedHourLeftOut: 4 });
  });

  test("one pass only: nobody can tell which, so the rows are left out by line", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(local("2024-10-27", "01:00", "01:30", "02:00", "02:30", "03:00"), zurich);
    expect(ends(series)).toEqual(["26T23:00", "26T23:30", "27T02:00"]);
    expect(counts.repeatedHourLeftOut).toBe(2);
    expect(told).toEqual([
      "gauges, line 4: this stamp falls in the hour that the clock repeats, and the order of the rows does not tell which is meant: left out; write stamps with Z or an offset",
      "gauges, line 5: this stamp falls in the hour that the clock repeats, and the order of the rows does not tell which is meant: left out; write stamps with Z or an offset",
    ]);
  });

  test("in a file out of order, the order tells nothing", async () => {
    const text = local("2024-10-27", "01:30", "01:00", "02:00", "02:30", "02:00", "02:30", "03:00");
    const { counts } = await read(text, zurich);
    expect(counts.repeatedHourLeftOut).toBe(4);
  });

  test("where tips were left out, silence is not dry", async () => {
    const { series } = await read(
      lines("gauge,time", "A,2024-10-27 01:00", "A,2024-10-27 02:30", "A,2024-10-27 04:00"),
      {
        ...zurich,
        kind: "tips",
        columns: { gauge: "gauge", time: "time" },
        tipMm: 0.2,
        silence: "dry",
      },
    );
    const notObserved = Array.from(series[0].depthMm, (depth, index) => ({ depth, index }))
      .filter(({ depth }) => Number.isNaN(depth))
      .map(({ index }) => [series[0].startEpochMs[index], series[0].endEpochMs[index]]);
    // The tip was at 00:30Z or at 01:30Z.
    expect(notObserved).toHaveLength(1);
    expect(notObserved[0][0]).toBeLessThan(Date.UTC(2024, 9, 27, 0, 30));
    expect(notObserved[0][1]).toBeGreaterThanOrEqual(Date.UTC(2024, 9, 27, 1, 30));
  });

  test("a stamp in the skipped hour is left out by line", async () => {
    const {
      series,
      counts,
      lines: told,
    } = await read(local("2024-03-31", "01:00", "01:30", "02:30", "03:00", "03:30"), zurich);
    expect(ends(series)).toEqual(["31T00:00", "31T00:30", "31T01:00", "31T01:30"]);
    expect(counts.skippedHour).toBe(1);
    expect(told).toEqual([
      'gauges, line 4: the stamp "2024-03-31 02:30" does not exist in zone Europe/Zurich, whose clock skipped it: the row is left out; check zone, or say dst: never if the logger\'s clock is not changed',
    ]);
  });

  test("standard time all year has no such hours", async () => {
    const { series, counts } = await read(local("2024-03-31", "01:30", "02:00", "02:30", "03:00"), {
      ...zurich,
      dst: "never",
    });
    expect(ends(series)).toEqual(["31T00:30", "31T01:00", "31T01:30", "31T02:00"]);
    expect(counts.skippedHour).toBe(0);
  });

  test("in a wide file the hour is settled once for all gauges", async () => {
    const times = ["01:30", "02:00", "02:30", "02:00", "02:30", "03:00"];
    const { series, counts } = await read(
      lines("time,A,B", ...times.map((time, index) => `2024-10-27 ${time},${index},${index}`)),
      { ...WIDE, zone: "Europe/Zurich" },
    );
    expect(counts.repeatedHourResolved).toBe(4);
    expect([...series[1].depthMm]).toEqual([0, 1, 2, 3, 4, 5]);
  });
});

test("a file longer than one chunk of the reader keeps its line numbers and every row", async () => {
  const rows = Array.from({ length: 60_000 }, (_, index) => {
    const stamp = new Date(Date.UTC(2031, 0, 1) + index * 60_000).toISOString();
    return `gauge-with-a-long-id,${stamp},${index === 59_990 ? "wet" : "0.2"}`;
  });
  const { series, counts, lines: told } = await read(lines("gauge,time,value", ...rows));
  expect(counts).toMatchObject({ rows: 60_000, values: 59_999, unreadableValues: 1 });
  expect(series[0].depthMm).toHaveLength(60_000);
  expect(told[0]).toContain("line 59992:");
});
