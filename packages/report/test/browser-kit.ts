import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, type BrowserContextOptions, chromium, type Page } from "playwright-core";
import { renderReport } from "../src/index.ts";
import { hostile } from "./hostile.ts";
import { inventedInput } from "./invented-input.ts";

/** Whether a browser is to be there: then its absence fails. */
export const BROWSER_WANTED = process.env.RAINRECKON_BROWSER === "1";
export const FOREIGN_WANTED = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

/** A page that is open, with all that it said and asked for. */
export interface OpenPage {
  readonly page: Page;
  readonly url: string;
  readonly complaints: readonly string[];
  readonly requests: readonly string[];
}

/** Chromium with the invented report in a folder of its own, as it is and with hostile names. */
export class ReportBrowser {
  readonly folder: string;
  readonly #browser: Browser;

  private constructor(folder: string, browser: Browser) {
    this.folder = folder;
    this.#browser = browser;
  }

  static async start(): Promise<ReportBrowser> {
    const folder = mkdtempSync(join(tmpdir(), "report-page-"));
    writeFileSync(join(folder, "plain.html"), renderReport(inventedInput()));
    writeFileSync(join(folder, "hostile.html"), renderReport(hostile(inventedInput())));
    const browser = await chromium.launch({
      executablePath: "/usr/bin/chromium",
      args: ["--no-sandbox", "--disable-gpu", "--disable-background-networking"],
    });
    return new ReportBrowser(folder, browser);
  }

  async stop(): Promise<void> {
    await this.#browser.close();
    rmSync(this.folder, { recursive: true });
  }

  /** Opens a page and waits until its script, if it may run, has done its part. */
  async open(
    name: string,
    {
      width = 1280,
      height = 900,
      ...options
    }: BrowserContextOptions & { width?: number; height?: number } = {},
  ): Promise<OpenPage> {
    const context = await this.#browser.newContext({ viewport: { width, height }, ...options });
    const page = await context.newPage();
    const complaints: string[] = [];
    const requests: string[] = [];
    page.on("console", (message) => complaints.push(message.text()));
    page.on("pageerror", (error) => complaints.push(error.message));
    page.on("request", (request) => {
      if (!request.url().startsWith("data:image/png")) requests.push(request.url());
    });
    const url = pathToFileURL(join(this.folder, name)).href;
    await page.goto(url);
    if (options.javaScriptEnabled !== false) await page.waitForSelector("html.ready");
    return { page, url, complaints, requests };
  }
}
