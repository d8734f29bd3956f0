import { basename } from "node:path";
import type { GaugeSeries, Notice } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../test/foreign-tools.ts";
import { scratchFolder } from "../../test/scratch.ts";
import type { GaugeFileSpec } from "./gauge-file-spec.ts";
import { readGaugeFiles } from "./read-gauge-files.ts";
import { sniffTable } from "./sniff-table.ts";
import { decideDateOrder, StampScanner } from "./stamp.ts";

/** Shapes that networks export. Depths and places are invented. */
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
  missing: ["", "-999"],
};

async function readAll(paths: readonly string[], spec: Partial<GaugeFileSpec> = {}) {
  const notices: Notice[] = [];
  const { series, counts } = await readGaugeFiles(paths, { ...LONG, ...spec }, (notice) =>
    notices.push(notice),
  );
  const told = notices.map(({ what, where, fix }) => `${basename(where)}: ${what}; ${fix}`);
  return { series, counts, told };
}
function write(content: string | Uint8Array, name = `shape-${++files}.csv`): string {
  return folder.write(name, content);
}
const read = (content: string | Uint8Array, spec: Partial<GaugeFileSpec> = {}) =>
  readAll([write(content)], spec);
const lines = (...rows: string[]) => `${rows.join("\n")}\n`;
const plain = (series: readonly GaugeSeries[]) =>
  series.map(({ id, startEpochMs, endEpochMs, depthMm }) => ({
    id,
    readings: Array.from(depthMm, (depth, k) => [
      new Date(startEpochMs[k]).toISOString().slice(0, 16),
      new Date(endEpochMs[k]).toISOString().slice(0, 16),
      depth,
    ]),
  }));

const ROWS = [
  ["Mühle", "2031-05-27T23:50", 0.2],
  ["Mühle", "2031-05-27T23:55", 0],
  ["Mühle", "2031-05-28T00:00", 1.4],
] as const;
/** What all the shapes below hold, written out by hand: five minutes that end at the stamp. */
const EXPECTED = [
  {
    id: "Mühle",
    readings: [
      ["2031-05-27T23:45", "2031-05-27T23:50", 0.2],
      ["2031-05-27T23:50", "2031-05-27T23:55", 0],
      ["2031-05-27T23:55", "2031-05-28T00:00", 1.4],
    ],
  },
];
const TABLE = lines("gauge,time,value", ...ROWS.map((row) => row.join(",")));

describe("encodings", () => {
  test.each([
    ["UTF-8 with a byte order mark", Buffer.from(`\ufeff${TABLE}`)],
    ["UTF-16 LE with a mark", Buffer.from(`\ufeff${TABLE}`, "utf16le")],
    ["UTF-16 BE with a mark", Buffer.from(`\ufeff${TABLE}`, "utf16le").swap16()],
    ["UTF-16 LE without", Buffer.from(TABLE, "utf16le")],
    ["UTF-16 BE without", Buffer.from(TABLE, "utf16le").swap16()],
    ["Latin-1", Buffer.from(TABLE, "latin1")],
    ["CRLF", Buffer.from(TABLE.replaceAll("\n", "\r\n"))],
  ])("%s", async (_name, bytes) => {
    const { series, told } = await read(bytes);
    expect(plain(series)).toEqual(EXPECTED);
    expect(told).toEqual([]);
  });

  test.skipIf(!FOREIGN_TOOLS).each(["UTF-16", "UTF-16LE", "UTF-16BE", "ISO-8859-1", "WINDOWS-1252", "UTF-8"])(
    "%s as iconv writes it (RAINRECKON_FOREIGN_TOOLS)",
    async (encoding) => {
      const source = write(TABLE);
      const target = `${folder.path}/iconv-${encoding}.csv`;
      outputOf("sh", ["-c", `iconv -f UTF-8 -t ${encoding} '${source}' > '${target}'`]);
      expect(plain((await readAll([target])).series)).toEqual(EXPECTED);
    },
  );

  test("the euro sign and quotes of windows-1252 (Python's cp1252: 0x80, 0x93)", async () => {
    const bytes = Buffer.from(TABLE.replaceAll("Mühle", "\u0080\u0093"), "latin1");
    const { series } = await read(bytes);
    expect(series[0].id).toBe("€“");
  });

  test("a row with bytes that are not UTF-8, far down in a file that is", async () => {
    const filler = Array.from({ length: 9000 }, (_, k) => {
      const stamp = new Date(Date.UTC(2031, 0, 1) + k * 300_000).toISOString().slice(0, 16);
      return `A,${stamp},0`;
    });
    const bytes = Buffer.from(
      lines("gauge,time,value", ...filler, "Mühle,2031-05-27T23:50,3", ...filler.slice(0, 8000)),
    );
    bytes[bytes.indexOf("ü") + 1] = 0x20;
    const { series, counts, told } = await read(bytes);
    expect(series.map(({ id }) => id)).toEqual(["A"]);
    expect(counts.malformedRows).toBe(1);
    expect(told[0]).toMatch(
      /line 9002: the row holds a character that is not utf-8: left out; name the encoding/,
    );
  });
});

describe("lines above the header", () => {
  const above = lines(
    "Invented network",
    "Station: 0042, at the mill",
    "",
    "time;value",
    "2031-05-27T23:50;0,2",
    "2031-05-27T23:55;0,4",
  );

  test("the header stands where the plan says; the id behind a label; lines keep their numbers", async () => {
    const { series, told } = await read(`${above}2031-05-28T00:00;x\n`, {
      columns: { time: "time", value: "value" },
      headerLine: 4,
      idFrom: "label",
      label: "Station",
      decimal: "comma",
    });
    expect(series[0].id).toBe("0042");
    expect([...series[0].depthMm]).toEqual([0.2, 0.4, Number.NaN]);
    expect(told[0]).toMatch(/line 7: the value "x"/);
  });

  test("and survey finds them", async () => {
    const guess = await sniffTable(write(above));
    expect(guess).toMatchObject({
      kind: "readings",
      delimiter: ";",
      readings: {
        headerLine: 4,
        decimal: { value: "comma" },
        idFrom: { value: "label" },
        label: "Station",
        gaugeIds: ["0042"],
        layout: { value: "long" },
      },
    });
  });

  test("padded with delimiters, as spreadsheets do, and with a row of units", async () => {
    const text = lines(
      "Invented;;",
      "Code;0042;",
      "Date;Rain;Temp",
      ";mm;C",
      "27.05.2031 23:50;0,2;9,5",
      "28.05.2031 00:00;0,4;9,4",
      "28.05.2031 00:10;0,4;9,4",
      "28.05.2031 00:20;0,4;9,4",
    );
    expect(await sniffTable(write(text))).toMatchObject({
      readings: {
        headerLine: 3,
        dates: { value: "dmy", standing: "found" },
        label: "Code",
        gaugeIds: ["0042"],
      },
    });
  });

  test("a label that is nowhere, and a header beyond the end", async () => {
    const spec = { columns: { time: "time", value: "value" }, idFrom: "label", label: "Gauge" } as const;
    await expect(read(above, { ...spec, headerLine: 4 })).rejects.toMatchObject({
      what: 'no line above the header begins with "Gauge" and an id',
    });
    await expect(read(above, { ...spec, headerLine: 90 })).rejects.toMatchObject({
      what: "there is no line 90",
    });
  });
});

describe("one file per gauge", () => {
  const one = lines("time,value", "2031-05-27T23:50,0.2", "2031-05-27T23:55,0.4");
  const spec = { columns: { time: "time", value: "value" }, idFrom: "file" } as const;

  test("the id is the file's name, or a part of it", async () => {
    const paths = [write(one, "rain_007_2031.csv"), write(one, "rain_NO_2032.csv")];
    const { series } = await readAll(paths, { ...spec, fileName: "rain_{id}_*" });
    expect(series.map(({ id }) => id)).toEqual(["007", "NO"]);
    expect((await readAll([paths[0]], spec)).series[0].id).toBe("rain_007_2031");
    await expect(readAll(paths, { ...spec, fileName: "tips_{id}" })).rejects.toMatchObject({
      what: 'the file\'s name does not fit the pattern "tips_{id}"',
      where: paths[0],
    });
  });

  test("survey takes a column headed by a quantity for the gauge of the file", async () => {
    const guess = await sniffTable(
      write(lines("time,rain_mm,temp_c", "2031-05-27T23:50,0.2,9", "2031-05-27T23:55,0.4,9"), "M-12.csv"),
    );
    expect(guess).toMatchObject({
      readings: { idFrom: { value: "file", standing: "guessed" }, gaugeIds: ["M-12"] },
    });
  });
});

describe("dates", () => {
  test.each([
    ["dmy", "27.05.2031 23:50", "2031-05-27T23:50:00Z"],
    ["dmy", "3/4/2031 1:05:30", "2031-04-03T01:05:30Z"],
    ["mdy", "3/4/2031 1:05 PM", "2031-03-04T13:05:00Z"],
    ["mdy", "12/31/2031 12:00 am", "2031-12-31T00:00:00Z"],
    ["dmy", "31.12.2031 24:00", "2032-01-01T00:00:00Z"],
    ["ymd", "2031/05/27 23:50", "2031-05-27T23:50:00Z"],
    ["ymd", "2031.5.7 3:05", "2031-05-07T03:05:00Z"],
    ["ymd", "203105272350", "2031-05-27T23:50:00Z"],
    ["ymd", "20310527 235000", "2031-05-27T23:50:00Z"],
    ["ymd", "20310527T2350Z", "2031-05-27T23:50:00Z"],
    ["dmy", "27.05.2031 23:50 +01:00", "2031-05-27T22:50:00Z"],
  ] as const)("%s: %s", (dates, text, instant) => {
    const stamps = new StampScanner({ dates });
    expect(stamps.scan(text)).toBe(true);
    const offset = Number.isNaN(stamps.offsetMinutes) ? 0 : stamps.offsetMinutes;
    expect(stamps.clockMs - offset * 60_000).toBe(Date.parse(instant));
  });

  test.each([
    ["dmy", "05/27/2031 12:00"],
    ["mdy", "27/05/2031 12:00"],
    ["dmy", "27.05.31 12:00"],
    ["dmy", "27.05/2031 12:00"],
    ["mdy", "5/27/2031 13:00 PM"],
    ["mdy", "5/27/2031 0:00 AM"],
    ["dmy", "2031-05-27T12:00"],
    ["ymd", "2031-05-27 125"],
    ["serial-1900", "2031-05-27 12:00"],
    ["serial-1900", "60.5"],
  ] as const)("%s refuses %s", (dates, text) => {
    expect(new StampScanner({ dates }).scan(text)).toBe(false);
  });

  // Day numbers: 45000 is 2023-03-15 and 36526 is 2000-01-01 in any spreadsheet of the 1900 system.
  test.each([
    ["36526.5", "2000-01-01T12:00:00Z"],
    ["45000.99306", "2023-03-15T23:50:00Z"],
    ["45000,9930555556", "2023-03-15T23:50:00Z"],
    ["45000.003483796", "2023-03-15T00:05:01Z"],
  ])("day number %s", (text, instant) => {
    const stamps = new StampScanner({ dates: "serial-1900" });
    expect(stamps.scan(text)).toBe(true);
    expect(new Date(stamps.clockMs).toISOString()).toBe(new Date(instant).toISOString());
  });

  test.skipIf(!FOREIGN_TOOLS)("all forms as Python writes them (RAINRECKON_FOREIGN_TOOLS)", () => {
    const script = `
import datetime as d, random
random.seed(4)
for _ in range(400):
    t = d.datetime(1970, 1, 1) + d.timedelta(minutes=random.randrange(0, 70_000_000))
    s = (t - d.datetime(1899, 12, 30)) / d.timedelta(days=1)
    print(int((t - d.datetime(1970, 1, 1)).total_seconds()), t.strftime("%d.%m.%Y %H:%M"), t.strftime("%m/%d/%Y %I:%M %p"), t.strftime("%Y%m%d%H%M"), f"{s:.6f}" if s % 1 else f"{s:.1f}", sep="|")
`;
    const scanners = (["dmy", "mdy", "ymd", "serial-1900"] as const).map(
      (dates) => new StampScanner({ dates }),
    );
    const rows = outputOf("python3", ["-c", script]).trim().split("\n");
    expect(rows).toHaveLength(400);
    for (const row of rows) {
      const [seconds, ...texts] = row.split("|");
      for (const [k, text] of texts.entries()) {
        expect([text, scanners[k].scan(text), scanners[k].clockMs]).toEqual([
          text,
          true,
          Number(seconds) * 1000,
        ]);
      }
    }
  });

  test("a day above 12 decides the order; nothing else does", () => {
    expect(decideDateOrder(["3/4/2031", "13/4/2031"])?.order).toBe("dmy");
    expect(decideDateOrder(["3/4/2031", "3/14/2031"])?.order).toBe("mdy");
    expect(decideDateOrder(["3/4/2031", "12/12/2031"])).toMatchObject({
      order: undefined,
      reason: /no day above 12/,
    });
    expect(decideDateOrder(["13/4/2031", "4/13/2031"])).toMatchObject({
      order: undefined,
      reason: /contradict/,
    });
    expect(decideDateOrder(["2031-04-03"])).toBeUndefined();
  });

  test("until somebody has settled the order, nothing is read", async () => {
    const text = lines("gauge,time,value", "A,03/04/2031 12:00,1", "A,03/04/2031 12:05,1");
    expect(await sniffTable(write(text))).toMatchObject({
      readings: { dates: { value: "ask", standing: "guessed" } },
    });
    await expect(read(text, { dates: "ask" })).rejects.toMatchObject({
      what: "the order of day and month is not settled",
      kind: "usage",
    });
    expect(plain((await read(text, { dates: "mdy" })).series)[0].readings[1][1]).toBe("2031-03-04T12:05");
  });

  test("date and time of day in two columns", async () => {
    const text = lines(
      "day,clock,gauge,value",
      "27.05.2031,23:50,Mühle,0.2",
      "27.05.2031,23:55,Mühle,0",
      "27.05.2031,24:00,Mühle,1.4",
    );
    const columns = { gauge: "gauge", date: "day", time: "clock", value: "value" };
    expect(plain((await read(text, { columns, dates: "dmy" })).series)).toEqual(EXPECTED);
    expect(await sniffTable(write(text))).toMatchObject({
      readings: { columns: { value: columns }, dates: { value: "dmy" } },
    });
  });

  test("a whole minute that a database missed is that minute, and counted; a tip stays where it is", async () => {
    const text = lines(
      "gauge,time,value",
      "A,2031-05-27T23:49:59.997,1",
      "A,2031-05-27T23:55:00.003,2",
      "A,2031-05-27T23:59:58,0",
    );
    const { series, counts } = await read(text);
    expect(counts.stampsSnapped).toBe(2);
    expect([...series[0].endEpochMs]).toEqual(
      ["23:50:00", "23:55:00", "23:59:58"].map((time) => Date.parse(`2031-05-27T${time}Z`)),
    );
    const tips = await read(text, { kind: "tips" });
    expect(tips.counts.stampsSnapped).toBe(0);
    expect(tips.series[0].endEpochMs[0]).toBe(Date.parse("2031-05-27T23:49:59.997Z"));
  });
});

describe("days", () => {
  const text = lines("gauge,time,value", "A,2031-03-29,1", "A,2031-03-30,2", "A,2031-03-31,3");

  test("stamps without a time of day need the hour at which days begin", async () => {
    const { counts, told } = await read(lines(text.trim(), "A,2031-03-31T09:00,3"));
    expect(counts.unreadableStamps).toBe(3);
    expect(told[0]).toMatch(/no time of day.*write dayHour/);
    expect(await sniffTable(write(text))).toMatchObject({ readings: { dateOnly: true } });
  });

  // European summer time began on Sunday 30 March 2031 at 01:00 UTC (last Sunday of March, IANA tz).
  test("a day on which the clock changes has 23 hours", async () => {
    const { series } = await read(text, { dayHour: 0, stamp: "start", zone: "Europe/Berlin" });
    expect(plain(series)[0].readings).toEqual([
      ["2031-03-28T23:00", "2031-03-29T23:00", 1],
      ["2031-03-29T23:00", "2031-03-30T22:00", 2],
      ["2031-03-30T22:00", "2031-03-31T22:00", 3],
    ]);
  });

  test("days that end at nine", async () => {
    const { series } = await read(text, { dayHour: 9, zone: "UTC+01:00" });
    expect(plain(series)[0].readings[0]).toEqual(["2031-03-28T08:00", "2031-03-29T08:00", 1]);
  });

  test("a reading marked as accumulated covers all the time since the last value", async () => {
    const rows = lines(
      "gauge,time,value,flag",
      "A,2031-03-28,1,",
      "A,2031-03-29,-999,",
      "A,2031-03-30,-999,",
      "A,2031-03-31,12.5,A",
    );
    const quality = { use: [""], doubt: [], drop: [], accumulated: ["A"] };
    const columns = { ...LONG.columns, quality: "flag" };
    const { series, counts } = await read(rows, { dayHour: 9, quality, columns });
    expect(counts.accumulated).toBe(1);
    expect(plain(series)[0].readings).toEqual([
      ["2031-03-27T09:00", "2031-03-28T09:00", 1],
      ["2031-03-28T09:00", "2031-03-31T09:00", 12.5],
    ]);
    expect([...series[0].quality]).toEqual([0, 0]);
  });

  test("one that nothing comes before is not observed", async () => {
    const rows = lines("gauge,time,value,flag", "A,2031-03-30,7,A", "A,2031-03-31,1,");
    const { series, told } = await read(rows, {
      dayHour: 9,
      quality: { use: [""], doubt: [], drop: [], accumulated: ["A"] },
      columns: { ...LONG.columns, quality: "flag" },
    });
    expect(series[0].depthMm[0]).toBeNaN();
    expect(told[0]).toMatch(/accumulates since a time that the files do not reach back to/);
  });
});

describe("numbers", () => {
  test("a decimal comma; a point is then none", async () => {
    const text = lines("gauge;time;value", "A;2031-05-27T23:50;0,25", "A;2031-05-27T23:55;0.25");
    const { series, told } = await read(text, { decimal: "comma" });
    expect([...series[0].depthMm]).toEqual([0.25, Number.NaN]);
    expect(series[0].resolutionMm).toBe(0.01);
    expect(told[0]).toMatch(/"0.25" of gauge "A" has a decimal point/);
  });

  test("below detection and traces are 0 mm, and counted", async () => {
    const text = lines(
      "gauge,time,value",
      "A,2031-05-27T23:50,<0.2",
      "A,2031-05-27T23:55,T",
      "A,2031-05-28T00:00,Tr",
      "A,2031-05-28T00:05,t",
    );
    const { series, counts } = await read(text);
    expect([...series[0].depthMm]).toEqual([0, 0, 0, Number.NaN]);
    expect(counts).toMatchObject({ belowDetection: 1, traces: 2, values: 3, unreadableValues: 1 });
    const strict = await read(text, { below: "missing", trace: [] });
    expect([...strict.series[0].depthMm]).toEqual([Number.NaN, Number.NaN, Number.NaN, Number.NaN]);
    expect(strict.counts).toMatchObject({ belowDetection: 1, traces: 0, unreadableValues: 3, missing: 1 });
  });
  test("a level below detection is no level: it would look like a reset of the counter", async () => {
    const text = lines(
      "gauge,time,value",
      "A,2031-05-27T23:50,5.0",
      "A,2031-05-27T23:55,<0.2",
      "A,2031-05-28T00:00,5.2",
    );
    const { series, counts } = await read(text, { kind: "counter" });
    expect(counts).toMatchObject({ belowDetection: 0, unreadableValues: 1, counterResets: 0 });
    expect([...series[0].depthMm].map((depth) => Number(depth.toFixed(6)))).toEqual([0.2]);
  });
});
