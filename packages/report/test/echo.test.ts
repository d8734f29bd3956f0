import { expect, test } from "vitest";
import { renderReport } from "../src/index.ts";
import { inventedInput } from "./invented-input.ts";

const ECHO = {
  screens: [{ name: "static echo", gates: 1234, districtMm: 0.25, worstCellMm: 11.5 }],
  corrections: [{ name: "attenuation", meanDb: 1.24, largestDb: -3.06 }],
  profile: [{ fromKm: 60, toKm: 70, wetGates: 900, meanDb: -4.44, lostGates: 12 }],
  radars: [{ id: "inv<quay>", statements: ["learned from 24 rounds"] }],
};

test("what was done to the echo has a section with its numbers, and its text is escaped", () => {
  const page = renderReport({ ...inventedInput(), echo: ECHO });
  expect(page).toContain('href="#echo"');
  expect(page).toMatch(/static echo<\/th><td class="number">1.234<\/td>/);
  expect(page).toContain("+1.2</td>");
  expect(page).toContain("\u22123.1</td>");
  expect(page).toMatch(/60 to 70<\/th>.*\u22124\.4/);
  expect(page).toContain("inv&lt;quay&gt;");
});

test("a run whose echo went straight to rain has no such section", () => {
  expect(renderReport(inventedInput())).not.toContain('id="echo"');
});
