import { readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { checkText } from "../src/check/check-text.ts";
import { type CheckDocument, checkSchema } from "../src/check/schema.ts";
import { trustSentence } from "../src/check/trust.ts";
import type { Terminal } from "../src/ui/terminal.ts";
import { planText, SOUND_GAUGES, STEP_MM, writeGauges, writeScans } from "./even-rain.ts";
import { inProcess } from "./run-cli.ts";
import { csvRows, scratchFolder, writeIn } from "./total-kit.ts";

// An hour of even rain over six sound gauges, one that is dead and one whose inches pass for millimetres.
const scratch = scratchFolder("check");
const RUN = path.join(scratch, "run");
const PLAN = path.join(scratch, "plan.yaml");
const GAUGES = [...SOUND_GAUGES, { id: "dead", times: 0 }, { id: "inches", times: 1.2 / 25.4 }];

beforeAll(async () => {
  await writeScans(scratch);
  writeGauges(scratch, GAUGES);
  writeIn(scratch, "plan.yaml", planText({ catchments: "" }));
  const { status, stderr } = await inProcess(["total", PLAN, "--out", RUN]);
  if (status !== 0) throw new Error(stderr);
});

async function checked(...args: readonly string[]): Promise<CheckDocument> {
  const { stdout, stderr, status } = await inProcess(["check", ...args, "--json"]);
  if (status !== 0) throw new Error(stderr);
  return checkSchema.parse(JSON.parse(stdout));
}

const verdictsOf = ({ gauges }: CheckDocument) =>
  gauges.map(({ gaugeId, verdict, cause }) => [gaugeId, verdict, cause?.name ?? ""]);

describe("a finished run", () => {
  test("says worst first what is wrong with which gauge, as its gauges.csv has it", async () => {
    const document = await checked(RUN);
    expect(verdictsOf(document).slice(0, 2).sort()).toEqual([
      ["dead", "leave out", "dead"],
      ["inches", "leave out", "wrong-unit"],
    ]);
    expect(verdictsOf(document).slice(2)).toEqual(SOUND_GAUGES.map(({ id }) => [id, "use", ""]));
    const table = csvRows(path.join(RUN, "gauges.csv"));
    for (const { gaugeId, verdict, cause } of document.gauges) {
      const row = table.find((one) => one.gauge_id === gaugeId);
      expect([row?.verdict, row?.cause]).toEqual([verdict, cause?.words ?? ""]);
    }
  });

  test("tells in one sentence how far to trust the radar: gauges read 1.2 times what it shows", async () => {
    const { trust, counts } = await checked(RUN);
    // 1/1.2 is 17 % less; the noise of the echo, half a decibel, makes it some 14 %.
    expect(trust).toMatch(/^The radar shows 1[3-7] % less than 6 gauges in use, and four in five/);
    expect(counts).toEqual({ use: 6, useWithCare: 0, leaveOut: 2, tooLittleRain: 0 });
  });

  test("its first screen is 80 columns by 24 lines at most", async () => {
    const { status, stdout } = await inProcess(["check", RUN]);
    expect(status).toBe(0);
    const lines = stdout.trimEnd().split("\n");
    expect(lines.length).toBeLessThan(24);
    for (const line of lines) expect([...line].length).toBeLessThanOrEqual(80);
    expect(stdout).toMatch(/^dead net +0\.0 +11\.\d █+\S* +LEAVE OUT +dead$/m);
  });

  test("--fail-on ends with 1 where a gauge is that bad, and says the same", async () => {
    const plain = await inProcess(["check", RUN]);
    const failing = await inProcess(["check", RUN, "--fail-on", "leave-out"]);
    process.exitCode = 0;
    expect([plain.status, failing.status]).toEqual([0, 1]);
    expect(failing.stdout).toBe(plain.stdout);
  });

  test("--html writes a page with the evidence, and no stranger's text becomes markup", async () => {
    const page = path.join(scratch, "check.html");
    expect((await inProcess(["check", RUN, "--html", page])).status).toBe(0);
    const text = readFileSync(page, "utf8");
    expect(text).toContain("wrong unit or factor");
    expect(text).toContain("default-src 'none'");
    const names = (await checked(RUN)).gauges.map(({ evidence }) => evidence.slice(0, 30));
    for (const words of names) expect(text).toContain(words.replaceAll("'", "&#39;"));
  });

  test("a checks.json that was changed since is refused", async () => {
    const file = path.join(RUN, "checks.json");
    const text = readFileSync(file, "utf8");
    writeFileSync(file, text.replace('"leave out"', '"use"'));
    const { status, stderr } = await inProcess(["check", RUN]);
    writeFileSync(file, text);
    expect([status, stderr]).toEqual([2, expect.stringContaining("checks.json was changed since")]);
  });
});

describe("a plan", () => {
  test("is checked anew, with the same verdicts, and nothing is left beside it", async () => {
    expect(await checked(PLAN)).toEqual(await checked(RUN));
  });

  test("--since counts from the newest scan, not from the plan's window", async () => {
    const document = await checked(PLAN, "--since", "30min");
    // The newest scan's middle is 13:05; windows are whole steps of 5 min.
    expect(document.window).toMatchObject({ start: "2031-06-01T12:35:00Z", end: "2031-06-01T13:05:00Z" });
    const [sound] = document.gauges.filter(({ gaugeId }) => gaugeId === "g1");
    // Gauges read until 13:00: five steps that both sides saw; single readings sway by 0.2 %.
    expect(Math.abs((sound?.gaugeMm ?? 0) / (5 * 1.2 * STEP_MM) - 1)).toBeLessThan(0.01);
    expect(await checked(RUN, "--since", "30min")).toEqual(document);
  });

  test.each([
    ["neither plan nor run", [path.join(scratch, "none.yaml")], /neither a plan nor a run/],
    ["a folder without a run", [scratch], /no finished run/],
    ["a time that is none", [PLAN, "--since", "soon"], /"3h"/],
  ])("%s is wrong usage", async (_, args, words) => {
    const { status, stderr } = await inProcess(["check", ...args]);
    expect([status, stderr]).toEqual([2, expect.stringMatching(words)]);
  });
});

describe("the words", () => {
  const SILENT: Terminal = {
    json: false,
    quiet: true,
    debug: false,
    live: false,
    result: () => undefined,
    note: () => undefined,
    strong: (text) => text,
  };

  test("many gauges: what is worst fits on the screen, and the rest is counted", async () => {
    const one = await checked(RUN);
    const bad = one.gauges[0]!;
    const gauges = Array.from({ length: 300 }, (_, k) => ({ ...bad, gaugeId: `\u001b[31mG${k}` }));
    const text = checkText({ ...one, gauges }, false, SILENT);
    expect(text.split("\n").length).toBeLessThan(24);
    expect(text).toMatch(/and 2\d\d gauges less in doubt/);
    expect(text).not.toContain("\u001b");
    expect(checkText({ ...one, gauges }, true, SILENT).split("\n").length).toBeGreaterThan(300);
  });

  test("too few sound gauges: nothing is said of the radar, rather than something", async () => {
    const { gauges } = await checked(RUN);
    const sound = gauges.filter(({ verdict }) => verdict === "use");
    expect(trustSentence(sound.slice(0, 4), [])).toMatch(/^Only 4 gauges in use saw enough rain/);
    expect(trustSentence([], [])).toMatch(/^There is no gauge/);
  });

  test("twice the gauges' depth at six gauges, one of which strays by half: worked by hand", async () => {
    const { gauges } = await checked(RUN);
    const made = [20, 20, 20, 20, 20, 30].map((radarMm) => ({ ...gauges.at(-1)!, gaugeMm: 10, radarMm }));
    // 130 / 60 = 2.17; strays: 20/10/2.17 - 1 = -8 % five times, +38 % once; the fifth of six is within four in five.
    expect(trustSentence(made, [])).toBe(
      "The radar shows 117 % more than 6 gauges in use, and four in five of them lie within 8 % of that.",
    );
    const [radar] = (await checked(RUN)).radars;
    const level = { name: "radar-level", blame: "radar" as const, words: "radar: level" };
    const doubted = ["A", "B"].map((radarId) => ({
      ...radar!,
      radarId,
      verdict: "use with care" as const,
      cause: level,
    }));
    expect(trustSentence(made, doubted)).toMatch(/8 % of that; doubt A and B: level\.$/);
  });
});
