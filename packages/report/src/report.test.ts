import { createHash } from "node:crypto";
import { expect, test } from "vitest";
import { hostile } from "../test/hostile.ts";
import { inventedInput } from "../test/invented-input.ts";
import type { ReportInput } from "./input.ts";
import { renderReport } from "./report.ts";

const input = inventedInput();
const page = renderReport(input);

/** What a reader sees of a piece of HTML: no tags, references read back, spaces made plain. */
function words(html: string): string {
  return html
    .replace(/<style>.*?<\/style>/s, "")
    .replace(/<script.*?<\/script>/gs, "")
    .replace(/<[^>]*>/g, " ")
    .replaceAll("&#39;", "'")
    .replaceAll("&quot;", '"')
    .replaceAll("&lt;", "<")
    .replaceAll("&gt;", ">")
    .replaceAll("&amp;", "&")
    .replace(/[\s\u00a0\u202f]+/g, " ");
}

/** The JSON that the page's script reads, as it stands in the page. */
function dataOf(html: string): string {
  return /<script type="application\/json" id="report-data">(.*?)<\/script>/s.exec(html)![1];
}

function renderWith(change: Partial<ReportInput>): string {
  return words(renderReport({ ...inventedInput(), ...change }));
}

test("the first screen has its parts in order, and the map after them", () => {
  const order = [
    "<h1>",
    'class="headline"',
    'class="trust"',
    'class="cautions',
    'id="map"',
    'class="contents"',
  ];
  const found = order.map((part) => page.indexOf(part));
  expect(found.every((at) => at > 0)).toBe(true);
  expect([...found].sort((a, b) => a - b)).toEqual(found);
});

test("one sentence says how much, of what share, when on both clocks, and where most", () => {
  const sentence = words(/<p class="headline">.*?<\/p>/s.exec(page)![0]);
  expect(
    sentence
      .trim()
      .replace(/ ([;.,)])/g, "$1")
      .replace(/\( /g, "("),
  ).toBe(
    "Saltermoor received 21.6 mm (at cap) of rain (94 % observed, radar adjusted to gauges) from " +
      "3 May 2031 14:00 to 20:00 (Europe/Amsterdam, UTC+2; 12:00 to 18:00 UTC); the wettest catchment was " +
      "Lower Sedge with 38.7 mm (at cap).",
  );
});

test("the caution that nobody chose the relation leads, whatever its place in the list", () => {
  const first = words(/<section class="cautions.*?<li>(.*?)<\/li>/s.exec(page)![1]);
  expect(first).toContain("Nobody chose the relation");
});

test("a depth seen in part only is at least that, from the plan's limit down", () => {
  const with71 = (minObserved: number) =>
    renderWith({ minObserved, headline: { ...input.headline, depth: { mm: 31, observedFraction: 0.71 } } });
  expect(with71(0.9)).toContain("Saltermoor received ≥ 31.0 mm of rain ( 71 % observed".replace("( ", "("));
  expect(with71(0.71)).toContain("Saltermoor received 31.0 mm of rain (71 % observed");
});

test("what is not known is a dash with its reason, never 0 and never NaN", () => {
  const unknown = { mm: Number.NaN, observedFraction: 0, reason: "no radar was running" };
  const text = renderWith({
    headline: { ...input.headline, depth: unknown },
    catchments: [
      { ...input.catchments[0], depth: unknown, radar: unknown, adjusted: unknown, maxCell: unknown },
    ],
  });
  expect(text).toContain(
    "How much rain fell on Saltermoor is not known – not available: no radar was running",
  );
  expect(text).not.toContain("wettest catchment was");
  expect(text).not.toMatch(/\bNaN\b|undefined|\[object/);
  expect(words(page)).not.toMatch(/\bNaN\b|undefined|\[object/);
});

test("without gauges, catchments, layers and scores the page says what is missing", () => {
  const text = renderWith({
    gauges: [],
    catchments: [],
    layers: [],
    relations: [],
    cautions: [],
    accounts: [],
    gaugeHyetographs: [],
    catchmentHyetographs: [],
    adjustment: { applied: false, reason: "the run had no gauges" },
    crossValidation: { reason: "nothing was adjusted" },
    scores: { pairs: "", radar: [], crossValidated: [] },
  });
  for (const part of [
    "no gauge checks these figures",
    "none the run had no gauges",
    "– nothing was adjusted",
    "The run had no gauges, so nothing here checks the radar.",
    "The run had no catchments, so there are no depths by area.",
    "Nothing: all input was taken as it came.",
  ]) {
    expect(text).toContain(part);
  }
});

test("a choice among methods shows its table, its rule, and the error that had no part in it", () => {
  const candidate = { errorMm: 4.4, meanErrorMm: -0.1, clusterErrorMm: 6.6, chosenInFolds: 3, notes: [] };
  const text = renderWith({
    methodChoice: {
      rule: "the smallest error",
      clusterRule: "the five nearest",
      chosen: "conditional merging",
      outerErrorMm: 5.2,
      outerClusterErrorMm: 7.3,
      candidates: [
        { ...candidate, title: "conditional merging" },
        { ...candidate, title: "gauges alone", errorMm: Number.NaN, notes: ["no figure at 2 gauges"] },
      ],
    },
  });
  expect(text).toContain("Picked: conditional merging. The rule: the smallest error.");
  expect(text).toMatch(/had no part in the choice either, the error is 5\.2 mm/);
  expect(text).toMatch(/and 7\.3 mm where all gauges near by are held out too/);
  expect(text).toContain("Clusters: the five nearest");
  expect(text).toMatch(/conditional merging 4\.4 .0\.1 6\.6 3/);
  expect(text).toContain("no figure at 2 gauges");
  expect(words(page)).not.toContain("Ways to adjust");
});

test("a radar has its verdict below those of the gauges; without any there is no head for it", () => {
  const section = (page: string) => /<section id="gauges"[\s\S]*?<\/section>/.exec(page)?.[0] ?? "";
  const input = inventedInput();
  expect(section(renderReport(input))).toContain("It has 0.85 times the rain of 20 trusted gauges.");
  expect(section(renderReport({ ...input, radarVerdicts: [] }))).not.toContain("<h3>Radars</h3>");
});

test("scores are sentences with radar/gauge said, their count, and their intervals", () => {
  const text = words(page);
  expect(text).toContain(
    "Radar saw 15 % less rain than the gauges 0.85 radar/gauge 90 % interval 0.78 to 0.93 over gauges",
  );
  expect(text).toContain("126 9 pairs dropped");
  expect(text).toContain("without an interval over blocks of time: fewer than 8 blocks of 60 minutes");
  expect(text).toContain("neither side ever reached the threshold");
  expect(text).toContain("× 1.18 mean-field bias, gauge/radar");
});

test("hostile names are text everywhere: no tag, attribute or address of theirs gets in", () => {
  const bad = renderReport(hostile(input));
  const tags = (html: string) => new Set([...html.matchAll(/<([a-zA-Z][^\s/>]*)/g)].map(([, tag]) => tag));
  expect(tags(bad)).toEqual(tags(page));
  const attributes = (html: string) =>
    new Set(
      [...html.matchAll(/<[a-zA-Z][^<>"]*(?:"[^"]*"[^<>"]*)*>/g)].flatMap(([tag]) =>
        [...tag.replace(/"[^"]*"/g, '""').matchAll(/\s([^\s=">]+)=/g)].map(([, name]) => name),
      ),
    );
  expect(attributes(bad)).toEqual(attributes(page));
  expect(bad).not.toMatch(/javascript:"|\u202e/);
  // Two script elements open and close: the data and the script, with nothing of theirs between or in them.
  expect(bad.match(/<script/g)?.length).toBe(2);
  expect(bad.match(/<\/script/g)?.length).toBe(2);
  expect(dataOf(bad)).not.toMatch(/<|\u202e|\\u202e|\\u0000/);
  expect(bad.match(/<style>/g)?.length).toBe(1);
  // The hostile words are still there to be read.
  expect(words(bad)).toContain("</script><script>window.broken=1</script>");
});

test("nothing is fetched: the only addresses are pictures inside the file and places on the page", () => {
  const addresses = [...page.matchAll(/\s(?:src|href|xlink:href|action|data)="([^"]*)"/g)].map(
    ([, address]) => address,
  );
  expect(addresses.length).toBeGreaterThan(10);
  for (const address of addresses) expect(address).toMatch(/^(data:image\/png;base64,|#)/);
  expect(page).not.toMatch(/@import|@font-face|url\((?!#)/);
});

test("the content policy names the style sheet that is there, and allows nothing else", () => {
  const style = /<style>(.*?)<\/style>/s.exec(page)![1];
  const hash = createHash("sha256").update(style).digest("base64");
  expect(page).toContain(
    `content="default-src &#39;none&#39;; img-src data:; style-src &#39;sha256-${hash}&#39;;`,
  );
  expect(page).not.toMatch(/\sstyle="/);
});

test("every place that the page links or points to is there once", () => {
  const ids = [...page.matchAll(/\sid="([^"]*)"/g)].map(([, id]) => id);
  expect(new Set(ids).size).toBe(ids.length);
  const wanted = [
    ...[...page.matchAll(/href="#([^"]*)"/g)].map(([, id]) => id),
    ...[...page.matchAll(/url\(#([^)]*)\)/g)].map(([, id]) => id),
    ...[...page.matchAll(/aria-labelledby="([^"]*)"/g)].flatMap(([, list]) => list.split(" ")),
    ...[...page.matchAll(/\sfor="([^"]*)"/g)].map(([, id]) => id),
  ];
  expect(wanted.filter((id) => !ids.includes(id))).toEqual([]);
});

test("tables have captions and scoped heads; pictures have a role and a name or are hidden", () => {
  expect(page.match(/<table/g)?.length).toBe(page.match(/<caption>/g)?.length);
  expect(page.match(/<th[\s>]/g)?.length).toBe(page.match(/<th scope="(col|row)"/g)?.length);
  for (const [tag] of page.matchAll(/<svg[^>]*>/g)) {
    expect(tag).toMatch(/role="img" aria-labelledby="|aria-hidden="true"/);
  }
});

test("the same input gives the same bytes", () => {
  expect(renderReport(inventedInput())).toBe(page);
});

test("a large run stays below 5 MB: noise on 300 x 300 cells, 400 gauges, 10,000 inputs", () => {
  const grid = { ...input.grid, nx: 300, ny: 300 };
  // A fixed scatter of depths and holes, as large as is drawn unthinned: nothing packs worse.
  let state = 1;
  const noise = Float32Array.from({ length: 300 * 300 }, () => {
    state = (state * 48271) % 2147483647;
    return state % 7 === 0 ? Number.NaN : state % 60;
  });
  const large = renderReport({
    ...input,
    grid,
    layers: input.layers.map((layer) =>
      layer.quantity === "radarIndex"
        ? { ...layer, values: noise.map((v) => v % 2) }
        : { ...layer, values: noise },
    ),
    gauges: Array.from({ length: 400 }, (_, i) => ({ ...input.gauges[i % 25], id: `G${i}` })),
    gaugeHyetographs: Array.from({ length: 400 }, (_, i) => ({
      ...input.gaugeHyetographs[i % 25],
      id: `G${i}`,
    })),
    provenance: {
      ...input.provenance,
      inputs: Array.from({ length: 10_000 }, (_, i) => ({
        ...input.provenance.inputs[0],
        path: `scans/${i}.h5`,
      })),
    },
  });
  expect(Buffer.byteLength(large)).toBeLessThan(5_000_000);
  expect(words(large)).toContain("And 9 800 more files");
});

test("a grid too fine for the screen is drawn thinned, and the page says so", () => {
  const [layer] = input.layers;
  const text = renderWith({
    grid: { ...input.grid, nx: 1201, ny: 10, cellM: 500 },
    layers: [{ ...layer, values: new Float32Array(12_010) }],
    shownLayerId: layer.id,
  });
  expect(text).toContain("1201 × 10 cells of 0.5 km. Drawn thinned, 5 × 5 cells to one of 2.5 km");
  expect(words(page)).not.toContain("Drawn thinned");
});
