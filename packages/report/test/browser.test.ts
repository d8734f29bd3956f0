import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { renderReport } from "../src/index.ts";
import { hostile } from "./hostile.ts";
import { inventedInput } from "./invented-input.ts";

const wanted = process.env.RAINRECKON_BROWSER === "1";
const foreign = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

describe.skipIf(!wanted)("in Chromium (skipped without RAINRECKON_BROWSER=1)", () => {
  let browser: Browser;
  let folder: string;

  beforeAll(async () => {
    folder = mkdtempSync(join(tmpdir(), "report-page-"));
    writeFileSync(join(folder, "plain.html"), renderReport(inventedInput()));
    writeFileSync(join(folder, "hostile.html"), renderReport(hostile(inventedInput())));
    browser = await chromium.launch({
      executablePath: "/usr/bin/chromium",
      args: ["--no-sandbox", "--disable-gpu", "--disable-background-networking"],
    });
  });

  afterAll(async () => {
    await browser?.close();
    rmSync(folder, { recursive: true });
  });

  /** Opens a page and writes down whatever it says on the console and asks of the network. */
  async function open(name: string, width: number, colorScheme: "light" | "dark") {
    const page = await browser.newPage({ viewport: { width, height: 900 }, colorScheme });
    const complaints: string[] = [];
    const requests: string[] = [];
    page.on("console", (message) => complaints.push(message.text()));
    page.on("pageerror", (error) => complaints.push(error.message));
    page.on("request", (request) => {
      if (!request.url().startsWith("data:image/png")) requests.push(request.url());
    });
    const url = pathToFileURL(join(folder, name)).href;
    await page.goto(url);
    return { page, complaints, requests, url };
  }

  test.each(["plain.html", "hostile.html"])(
    "%s: no script, no complaint, no request, no sideways scroll, in any light or width",
    async (name) => {
      const { page, complaints, requests, url } = await open(name, 390, "light");
      for (const colorScheme of ["light", "dark"] as const) {
        await page.emulateMedia({ colorScheme });
        for (const width of [390, 768, 1280, 1600]) {
          await page.setViewportSize({ width, height: 900 });
          expect([colorScheme, width, await page.evaluate("document.documentElement.scrollWidth")]).toEqual([
            colorScheme,
            width,
            width,
          ]);
        }
      }
      expect(await page.evaluate("window.broken")).toBeUndefined();
      expect(await page.evaluate("document.scripts.length")).toBe(0);
      expect(complaints).toEqual([]);
      expect(requests).toEqual([url]);
      // The page is there to be seen: a style that hides it did not get in.
      expect(await page.locator("h1").isVisible()).toBe(true);
      await page.close();
    },
  );

  test("dark and light differ on the page, not on the map's paper", async () => {
    const { page } = await open("plain.html", 1280, "light");
    const colours = async (colorScheme: "light" | "dark") => {
      await page.emulateMedia({ colorScheme });
      const of = (selector: string) =>
        page.evaluate(
          `getComputedStyle(document.querySelector(${JSON.stringify(selector)})).backgroundColor`,
        );
      return { page: await of("body"), map: await of(".map-sheet") };
    };
    const light = await colours("light");
    const dark = await colours("dark");
    expect(dark.page).not.toBe(light.page);
    expect(dark.map).toBe(light.map);
    await page.close();
  });

  test("the buttons change the layer and its legend without any script", async () => {
    const { page } = await open("plain.html", 1280, "light");
    const visible = async () => ({
      legends: await page.locator(".legend:visible h3").allTextContents(),
      layers: await page.evaluate(
        "[...document.querySelectorAll('.layer')].map((g) => getComputedStyle(g).display !== 'none')",
      ),
    });
    expect(await visible()).toEqual({
      legends: ["Adjusted totalmm"],
      layers: [false, true, false, false, false],
    });
    await page.getByLabel("Who spoke").check();
    expect(await visible()).toEqual({ legends: ["Who spoke"], layers: [false, false, false, false, true] });
    await page.close();
  });

  test("a gauge stands over the pixel of its cell, as the browser lays them out", async () => {
    const { page } = await open("plain.html", 1280, "light");
    const place = await pixelUnderGauge(page, 7);
    const { grid, gauges } = inventedInput();
    expect(place).toEqual({
      column: Math.floor((gauges[7].xM - grid.westM) / grid.cellM),
      row: Math.floor((grid.northM - gauges[7].yM) / grid.cellM),
    });
    await page.close();
  });

  test.skipIf(!foreign)(
    "every printed page has run and status at its foot (needs RAINRECKON_FOREIGN_TOOLS=1)",
    async () => {
      const { page } = await open("plain.html", 1280, "dark");
      const file = join(folder, "report.pdf");
      await page.pdf({ path: file, preferCSSPageSize: true });
      const pages = execFileSync("pdftotext", ["-layout", file, "-"], { encoding: "utf8" })
        .split("\f")
        .slice(0, -1);
      expect(pages.length).toBeGreaterThan(4);
      for (const [i, text] of pages.entries()) {
        expect(text).toContain("Provisional: run 4be1c07a9d3f5526");
        expect(text).toContain(`Page ${i + 1} of ${pages.length}`);
      }
      await page.close();
    },
  );
});

/** Column and row of the picture's pixel that lies under the middle of a gauge's mark. */
async function pixelUnderGauge(page: Page, index: number): Promise<unknown> {
  return await page.evaluate(`(() => {
    const cells = document.querySelector(".layer-1 image");
    const box = cells.getBoundingClientRect();
    const mark = document.querySelectorAll(".places .gauge")[${index}].getBoundingClientRect();
    const [x, y] = [(mark.left + mark.right) / 2, (mark.top + mark.bottom) / 2];
    return {
      column: Math.floor(((x - box.left) / box.width) * Number(cells.getAttribute("width"))),
      row: Math.floor(((y - box.top) / box.height) * Number(cells.getAttribute("height"))),
    };
  })()`);
}
