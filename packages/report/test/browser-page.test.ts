import axe, { type AxeResults } from "axe-core";
import type { Locator, Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from "vitest";
import { BROWSER_WANTED, type OpenPage, ReportBrowser } from "./browser-kit.ts";
import { inventedDepthMm, inventedInput } from "./invented-input.ts";

const input = inventedInput();
const { grid, gauges } = input;

describe.skipIf(!BROWSER_WANTED)("the living page in Chromium (skipped without RAINRECKON_BROWSER=1)", () => {
  let browser: ReportBrowser;
  let open: OpenPage;
  let page: Page;
  let readout: Locator;
  let stage: Locator;

  beforeAll(async () => {
    browser = await ReportBrowser.start();
  });
  afterAll(() => browser?.stop());
  beforeEach(async () => {
    open = await browser.open("plain.html", { permissions: ["clipboard-read", "clipboard-write"] });
    page = open.page;
    readout = page.locator(".readout");
    stage = page.locator(".map-stage");
  });
  afterEach(async () => {
    expect(open.complaints).toEqual([]);
    expect(open.requests).toEqual([open.url]);
    await page.context().close();
  });

  /** Moves the pointer over the middle of a cell of the grid. */
  async function pointAt(column: number, row: number) {
    await stage.scrollIntoViewIfNeeded();
    const box = await page.locator(".map-canvas").boundingBox();
    if (box === null) throw new Error("the map has no canvas");
    const at = {
      x: box.x + ((column + 0.5) * box.width) / grid.nx,
      y: box.y + ((row + 0.5) * box.height) / grid.ny,
    };
    await page.mouse.move(at.x, at.y);
    return at;
  }

  const cellOf = ({ xM, yM }: { xM: number; yM: number }) => ({
    column: Math.floor((xM - grid.westM) / grid.cellM),
    row: Math.floor((grid.northM - yM) / grid.cellM),
  });
  const words = async (locator: Locator) =>
    ((await locator.textContent()) ?? "").replace(/[\s\u00a0\u202f]+/g, " ");

  test("hovering says value, unit and place; the picture has the colour that the legend gives that value", async () => {
    const [column, row] = [52, 30];
    const depth = inventedDepthMm(grid.westM + (column + 0.5) * 1000, grid.northM - (row + 0.5) * 1000);
    await pointAt(column, row);
    expect(await words(readout)).toContain(`Adjusted total: ${depth.toFixed(1)} mm`);
    expect(await words(readout)).toContain("−7.5 km east, 14.5 km north");
    const colour = await page.evaluate(
      `(() => { const c = document.querySelector(".map-canvas"); const p = c.getContext("2d").getImageData(Math.floor((${column} + 0.5) * c.width / ${grid.nx}), Math.floor((${row} + 0.5) * c.height / ${grid.ny}), 1, 1).data; return "rgb(" + [p[0], p[1], p[2]].join(",") + ")"; })()`,
    );
    const legend = await page
      .locator(".live-legend li")
      .evaluateAll((all) =>
        all.map((li) => [li.textContent ?? "", li.querySelector("rect")?.getAttribute("fill") ?? ""]),
      );
    const entry = legend.find(([, fill]) => fill === colour);
    const [low, high] = (/^([\d.]+) – ([\d.]+)$/.exec(entry?.[0] ?? "") ?? ["", "NaN", "NaN"])
      .slice(1)
      .map(Number);
    expect(depth).toBeGreaterThanOrEqual(low);
    expect(depth).toBeLessThan(high);
    // A sector that no radar saw.
    await pointAt(20, 5);
    expect(await words(readout)).toContain("Adjusted total: not observed");
  });

  test("the list holds every further layer; a button takes the map back", async () => {
    const picture = () => page.evaluate(`document.querySelector(".map-canvas").toDataURL()`);
    const before = await picture();
    await page.locator("#more-layers").selectOption({ label: "Vertical profile" });
    expect(await words(page.locator(".live-legend h3"))).toBe("Vertical profiledB");
    expect(await picture()).not.toBe(before);
    expect(await page.locator("input[name=map-layer]:checked").count()).toBe(0);
    await pointAt(22, 33);
    expect(await words(readout)).toMatch(/Vertical profile: −3\.\d dB/);
    await page.getByLabel("Who spoke").check();
    await pointAt(22, 33);
    expect(await words(readout)).toContain("Who spoke: inv-moor · Moor Top");
    await page.getByLabel("Adjusted total").check();
    expect(await picture()).toBe(before);
    const groups = await page
      .locator("#more-layers optgroup")
      .evaluateAll((all) => all.map((g) => g.getAttribute("label")));
    expect(groups).toEqual(["How sure", "Time", "What was corrected", "What was screened"]);
  });

  test("the slider goes through the intervals by key, and they add up to the total", async () => {
    const slider = page.locator("#map-time");
    const read = async () => Number(/: ([\d.]+) mm/.exec(await words(readout))?.[1]);
    await pointAt(70, 40);
    const total = await read();
    await slider.focus();
    let sum = 0;
    for (let hour = 0; hour < 6; hour += 1) {
      await page.keyboard.press("ArrowRight");
      expect(await slider.getAttribute("aria-valuetext")).toBe(
        `3 May ${14 + hour}:00 to ${15 + hour}:00 (${12 + hour}:00 to ${13 + hour}:00 UTC)`,
      );
      sum += await read();
    }
    // Six roundings to a tenth.
    expect(Math.abs(sum - total)).toBeLessThanOrEqual(0.35);
    await page.getByLabel("Observed share").check();
    expect(await slider.isDisabled()).toBe(true);
    expect(await words(page.locator(".time-words"))).toBe("This layer holds for the whole window");
  });

  test("play and pause by keyboard", async () => {
    const play = page.getByRole("button", { name: "Play" });
    await play.focus();
    await page.keyboard.press("Space");
    const time = page.locator(".time-words");
    await expect.poll(() => words(time)).toContain("14:00 to 15:00");
    await expect.poll(() => words(time), { timeout: 5000 }).toContain("15:00 to 16:00");
    await page.keyboard.press("Enter");
    const still = await words(time);
    await page.waitForTimeout(1500);
    expect(await words(time)).toBe(still);
    await page.getByRole("button", { name: "Whole window" }).click();
    expect(await words(time)).toContain("Whole window");
  });

  test("a click on a gauge tells its rain beside the radar's, its verdict, cause and evidence", async () => {
    const at = await pointAt(cellOf(gauges[4]).column, cellOf(gauges[4]).row);
    await page.mouse.click(at.x, at.y);
    const panel = await words(page.locator(".place-panel"));
    expect(panel).toContain("Gauge R05");
    expect(panel).toContain("silent gauge");
    expect(panel).toContain("6 gauges around it lie within a factor of 1.3 of radar");
    expect(panel).toContain("takes no part in the adjustment");
    const rain = page.locator(".place-rain");
    expect(
      await rain.locator("svg.series").locator(".bars.gauge, .step-line.radar, .step-line.held-out").count(),
    ).toBe(5);
    await rain.getByText("Numbers").click();
    const shown = await rain
      .locator("tbody tr")
      .evaluateAll((rows) => rows.map((row) => Number(row.children[3]?.textContent)));
    const radar = Array.from(input.gaugeHyetographs[4].sides[1].depthMm).reduce((sum, mm) => sum + mm, 0);
    expect(shown.length).toBe(72);
    expect(Math.abs(shown.filter(Number.isFinite).reduce((sum, mm) => sum + mm, 0) - radar)).toBeLessThan(
      72 * 0.05,
    );
    expect(await words(rain.locator(".series-words"))).toContain(`radar ${radar.toFixed(1)} mm`);
  });

  test("keyboard alone: to the map, from gauge to gauge, into a catchment, along its chart, and back", async () => {
    for (let tabs = 0; tabs < 40 && !(await stage.evaluate((node) => node.matches(":focus"))); tabs += 1)
      await page.keyboard.press("Tab");
    expect(await page.locator(".hint").isVisible()).toBe(true);
    await page.keyboard.press("PageDown");
    await page.keyboard.press("PageDown");
    expect(await words(readout)).toMatch(/^Gauge R02 · Adjusted total: /);
    await page.keyboard.press("Enter");
    expect(await words(page.locator(".place-head h3"))).toContain("Gauge R02");
    await page.keyboard.press("Tab");
    await page.keyboard.press("Enter");
    expect(await page.locator(".place-head").count()).toBe(0);
    // Focus is back on the map: five cells south of a gauge-free place of Mere Drain.
    await page.keyboard.press("Escape");
    for (let k = 0; k < 2; k += 1) await page.keyboard.press("Shift+ArrowLeft");
    await page.keyboard.press("ArrowDown");
    await page.keyboard.press("Enter");
    expect(await words(page.locator(".place-head h3"))).toContain("Mere Drain");
    await page.locator("#place-chart").focus();
    await page.keyboard.press("End");
    expect(await page.locator("#place-chart").getAttribute("aria-valuetext")).toMatch(
      /^Ending 3 May 20:00 \(18:00 UTC\): radar .* mm, so far .*; adjusted radar .* mm, so far /,
    );
    await stage.focus();
    await page.keyboard.press(".");
    expect(await words(page.locator(".time-words"))).toContain("14:00 to 15:00");
    await page.keyboard.press(",");
    expect(await words(page.locator(".time-words"))).toContain("Whole window");
  });

  test("a catchment shows depth, p10 to p90, share observed and its lower bound; radars and assets answer too", async () => {
    await pointAt(105, 25);
    await page.mouse.click(...(Object.values(await pointAt(105, 25)) as [number, number]));
    const panel = page.locator(".place-panel");
    expect(await words(panel)).toContain("Outer Fen");
    expect(await words(panel)).toContain("≥ 7.1 mm");
    expect(await words(panel)).toContain("6.0 and 8.4 mm (p10–p90)");
    expect(await words(panel)).toContain("71 %");
    expect(await words(panel)).toContain("27 % of the area lies beyond usable beam");
    expect(await page.locator(".place-rain .range").count()).toBe(2);
    await page.locator("#find-place").selectOption("r0");
    expect(await words(panel)).toContain("Radar inv-moor");
    await page.locator("#find-place").selectOption("a0");
    expect(await words(panel)).toContain("Pumping station");
    expect(await page.locator(".place-rain").isVisible()).toBe(false);
  });

  test("scatter and map point at each other, by pointer and by key", async () => {
    const scatter = page.locator("#gauges-radar svg.scatter").first();
    const onMap = (key: string) => page.locator(`.map-stage [data-place=${key}]`);
    await scatter.locator("[data-place=g16]").hover();
    expect(await onMap("g16").getAttribute("class")).toContain("lit");
    await scatter.locator("[data-place=g16]").click();
    expect(await onMap("g16").getAttribute("class")).toContain("chosen");
    expect(await words(page.locator(".place-head h3"))).toContain("Gauge 016");
    await scatter.locator("[tabindex='0']").focus();
    await page.keyboard.press("ArrowRight");
    const key = await page.evaluate("document.activeElement.dataset.place");
    await page.keyboard.press("Enter");
    expect(await onMap(String(key)).getAttribute("class")).toContain("chosen");
    await pointAt(cellOf(gauges[1]).column, cellOf(gauges[1]).row);
    expect(await scatter.locator("[data-place=g1]").getAttribute("class")).toContain("lit");
  });

  test("tables sort by number and by word, say so, and go back; what is missing stays last", async () => {
    const table = page.locator("#gauges-radar table");
    const head = table.locator("th", { hasText: "Radar mm" });
    const column = async () => await table.locator("tbody tr td:nth-child(4)").allTextContents();
    const before = await column();
    const asNumber = (text: string) => (text.startsWith("–") ? Number.NaN : Number(text));
    const known = before.map(asNumber).filter(Number.isFinite);
    await head.getByRole("button").click();
    expect(await head.getAttribute("aria-sort")).toBe("ascending");
    const up = (await column()).map(asNumber);
    expect(up.filter(Number.isFinite)).toEqual(known.toSorted((a, b) => a - b));
    expect(up.slice(known.length).every(Number.isNaN)).toBe(true);
    await page.keyboard.press("Enter");
    expect(await head.getAttribute("aria-sort")).toBe("descending");
    const down = (await column()).map(asNumber);
    expect(down.filter(Number.isFinite)).toEqual(known.toSorted((a, b) => b - a));
    expect(down.slice(known.length).every(Number.isNaN)).toBe(true);
    await page.keyboard.press("Enter");
    expect(await head.getAttribute("aria-sort")).toBeNull();
    expect(await column()).toEqual(before);
  });

  test("the table stays beside its charts, with its tools above it", async () => {
    const boxOf = async (selector: string) => {
      const box = await page.locator(selector).first().boundingBox();
      if (box === null) throw new Error(`${selector} is not shown`);
      return box;
    };
    const chart = await boxOf("#gauges-radar figure");
    const tools = await boxOf("#gauges-radar .table-tools");
    const table = await boxOf("#gauges-radar .scroll");
    expect(table.x).toBeGreaterThanOrEqual(chart.x + chart.width);
    expect(table.x).toBeCloseTo(tools.x, 0);
    expect(table.y).toBeGreaterThanOrEqual(tools.y + tools.height);
    expect(table.y).toBeLessThan(chart.y + chart.height);
  });

  test("tables copy as CSV and TSV: plain numbers, marks in a column of their own, missing empty with its reason", async () => {
    const section = page.locator("#catchments");
    await section.getByRole("button", { name: "Copy as CSV" }).click();
    await expect.poll(() => words(section.locator(".copied"))).toBe("Copied.");
    const csv = String(await page.evaluate("navigator.clipboard.readText()")).split("\r\n");
    expect(csv[0]).toBe(
      [
        "Catchment",
        ...["Depth mm", "Observed", "Radar mm", "Adjusted mm", "Wettest cell mm"].flatMap((head) => [
          head,
          `"${head}, mark"`,
        ]),
        "p10 mm",
        "p90 mm",
        "Area km²",
        "Note",
      ].join(","),
    );
    expect(csv.find((line) => line.includes("Lower Sedge"))).toMatch(/^Lower SedgeC2,38\.7,at cap,100,%,/);
    expect(csv.find((line) => line.includes("Outer Fen"))).toMatch(
      /^Outer FenC5,7\.1,at least,71,%,6,at least,/,
    );
    await page.locator("#gauges-radar").getByRole("button", { name: "Copy as TSV" }).click();
    await expect
      .poll(async () => String(await page.evaluate("navigator.clipboard.readText()")))
      .toContain("\t");
    const tsv = String(await page.evaluate("navigator.clipboard.readText()")).split("\r\n");
    expect(tsv.length).toBe(gauges.length + 1);
    expect(tsv.find((line) => line.startsWith("R04"))).toContain("\t\tradar did not observe this place\t");
  });

  test("inches everywhere and back: headline, tables, legend, map, charts", async () => {
    const everything = () => page.evaluate("document.body.innerText");
    await pointAt(70, 40);
    await page.mouse.move(0, 0);
    await page.locator("#find-place").selectOption("c1");
    const before = await everything();
    await page.getByLabel("inch").check();
    expect(await words(page.locator(".headline"))).toContain("received 0.85 in (at cap) of rain");
    expect(await words(page.locator("#catchments thead"))).toContain("Depth in");
    const row = page.locator("#catchments tbody tr", { hasText: "Lower Sedge" });
    expect(await words(row.locator("td").first())).toBe("1.52 at cap");
    expect(await words(row.locator("td").nth(1))).toBe("100 %");
    expect(await words(page.locator(".live-legend h3"))).toBe("Adjusted totalin");
    expect(await words(readout)).toMatch(/Adjusted total: 1\.\d\d in/);
    expect(await words(page.locator(".place-panel"))).toContain("1.52 in (at cap)");
    expect(await words(page.locator(".place-rain"))).toContain("in per 5 minutes");
    // What is left says how the page holds its numbers, and what a millimetre is.
    const left = (await words(page.locator("main"))).replace("by steps of 0.1 mm", "");
    expect(left).not.toMatch(/\d mm(?! is one litre)\b/);
    await page.getByLabel("mm", { exact: true }).check();
    expect(await everything()).toBe(before);
  });

  test("light and dark by a switch, whatever the system says; the map's paper stays", async () => {
    const colour = (selector: string) =>
      page.evaluate(`getComputedStyle(document.querySelector(${JSON.stringify(selector)})).backgroundColor`);
    const [body, paper] = [await colour("body"), await colour(".map-sheet")];
    await page.getByLabel("dark").check();
    const dark = await colour("body");
    expect(dark).not.toBe(body);
    expect(await colour(".map-sheet")).toBe(paper);
    await page.getByLabel("as the system").check();
    expect(await colour("body")).toBe(body);
    await page.emulateMedia({ colorScheme: "dark" });
    expect(await colour("body")).toBe(dark);
    await page.getByLabel("light", { exact: true }).check();
    expect(await colour("body")).toBe(body);
  });

  test("on a phone: no sideways scroll with a gauge open, and the map answers a touch", async () => {
    await page.setViewportSize({ width: 390, height: 844 });
    const at = await pointAt(cellOf(gauges[4]).column, cellOf(gauges[4]).row);
    await page.mouse.click(at.x, at.y);
    expect(await words(page.locator(".place-head h3"))).toContain("Gauge R05");
    await page.getByLabel("inch").check();
    expect(await page.evaluate("document.documentElement.scrollWidth")).toBe(390);
    const small = await page
      .locator("button:visible, select:visible")
      .evaluateAll((all) =>
        all.filter((one) => one.getBoundingClientRect().height < 24).map((one) => one.textContent),
      );
    // Targets of at least 24 pixels: WCAG 2.2, 2.5.8.
    expect(small).toEqual([]);
  });

  test.each([
    ["light", 1280],
    ["dark", 390],
  ] as const)(
    "an accessibility library finds nothing serious: %s, %d px, with a place open",
    async (colorScheme, width) => {
      await page.emulateMedia({ colorScheme });
      await page.setViewportSize({ width, height: 900 });
      await page.locator("#find-place").selectOption("g4");
      await page.locator(".place-rain summary").click();
      await page.evaluate(axe.source);
      const results = (await page.evaluate(
        "axe.run(document, { resultTypes: ['violations'] })",
      )) as AxeResults;
      expect(results.passes.length).toBeGreaterThan(20);
      expect(
        results.violations.map(({ id, impact, nodes }) => [
          impact,
          id,
          nodes.length,
          nodes[0]?.html.slice(0, 160),
        ]),
      ).toEqual([]);
    },
  );
});
