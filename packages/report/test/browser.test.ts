import { execFileSync } from "node:child_process";
import { join } from "node:path";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { BROWSER_WANTED, FOREIGN_WANTED, ReportBrowser } from "./browser-kit.ts";
import { inventedInput } from "./invented-input.ts";

describe.skipIf(!BROWSER_WANTED)("in Chromium (skipped without RAINRECKON_BROWSER=1)", () => {
  let browser: ReportBrowser;

  beforeAll(async () => {
    browser = await ReportBrowser.start();
  });

  afterAll(() => browser?.stop());

  test.each(["plain.html", "hostile.html"])(
    "%s: no complaint, no request, nobody else's script, no sideways scroll, in any light or width",
    async (name) => {
      const { page, complaints, requests, url } = await browser.open(name, { width: 390 });
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
      // Everything that can be picked is shown once: what is in its texts stays text.
      for (const key of ["c1", "g4", "g5", "r0", "a0"]) {
        await page.locator("#find-place").selectOption(key);
        expect(await page.locator(".place-head h3").isVisible()).toBe(true);
      }
      expect(await page.evaluate("window.broken")).toBeUndefined();
      expect(await page.evaluate("document.scripts.length")).toBe(2);
      expect(complaints).toEqual([]);
      expect(requests).toEqual([url]);
      // The page is there to be seen: a style that hides it did not get in.
      expect(await page.locator("h1").isVisible()).toBe(true);
      await page.context().close();
    },
  );

  test("without script the page stands whole: buttons change the layer, and no dead control is shown", async () => {
    const { page } = await browser.open("plain.html", { javaScriptEnabled: false });
    const visible = async () => ({
      legends: await page.locator(".legend:visible h3").allTextContents(),
      layers: await page
        .locator(".layer:visible")
        .evaluateAll((all) => all.map((g) => g.getAttribute("class"))),
    });
    expect(await visible()).toEqual({ legends: ["Adjusted totalmm"], layers: ["layer layer-1"] });
    await page.getByLabel("Who spoke").check();
    expect(await visible()).toEqual({ legends: ["Who spoke"], layers: ["layer layer-4"] });
    expect(await page.locator("button, select").count()).toBe(0);
    await page.context().close();
  });

  test("a gauge stands over the pixel of its cell, as the browser lays them out", async () => {
    const { page } = await browser.open("plain.html", { javaScriptEnabled: false });
    const place = await pixelUnderGauge(page, 7);
    const { grid, gauges } = inventedInput();
    expect(place).toEqual({
      column: Math.floor((gauges[7].xM - grid.westM) / grid.cellM),
      row: Math.floor((grid.northM - gauges[7].yM) / grid.cellM),
    });
    await page.context().close();
  });

  describe.skipIf(!FOREIGN_WANTED)("on paper (needs RAINRECKON_FOREIGN_TOOLS=1)", () => {
    async function printed(
      javaScriptEnabled: boolean,
      act?: (page: Page) => Promise<void>,
    ): Promise<string[]> {
      const { page } = await browser.open("plain.html", { javaScriptEnabled, colorScheme: "dark" });
      await act?.(page);
      const file = join(browser.folder, `report-${javaScriptEnabled}.pdf`);
      await page.pdf({ path: file, preferCSSPageSize: true });
      await page.context().close();
      return execFileSync("pdftotext", ["-layout", file, "-"], { encoding: "utf8" }).split("\f").slice(0, -1);
    }

    test("every page has run and status at its foot, and the map is on the first", async () => {
      const pages = await printed(true);
      expect(pages.length).toBeGreaterThan(4);
      for (const [i, text] of pages.entries()) {
        expect(text).toContain("Provisional: run 4be1c07a9d3f5526");
        expect(text).toContain(`Page ${i + 1} of ${pages.length}`);
      }
      expect(pages[0]).toContain("km east");
      expect(pages[0]).toContain("not observed");
    });

    test("the script takes no word away from the paper, adds no control, and a chosen place is printed", async () => {
      const words = (pages: readonly string[]) =>
        new Set(
          pages
            .join(" ")
            .replace(/Page \d+ of \d+/g, "")
            .split(/\s+/),
        );
      const still = words(await printed(false));
      const live = await printed(true);
      const heard = words(live);
      expect([...still].filter((word) => !heard.has(word))).toEqual([]);
      for (const control of ["Play", "Copy", "inch", "More layers", "Look at"]) {
        expect(live.join(" ")).not.toContain(control);
      }
      const chosen = await printed(true, async (page) => {
        await page.locator("#find-place").selectOption("g4");
      });
      expect(chosen.join(" ")).toContain("Gauge R05");
      expect(chosen.join(" ")).toContain("silent gauge");
    });
  });
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
