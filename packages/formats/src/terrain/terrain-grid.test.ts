import { copyFileSync, readFileSync, writeFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { InputError } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../test/foreign-tools.ts";
import { mutant, random } from "../../test/mutations.ts";
import { removeTemporary, temporaryPath } from "../../test/odim-fixture.ts";
import { readTerrain } from "./terrain-grid.ts";

/** terrain.tif is written by gdal_translate (GDAL 3.6.2) from terrain.asc, EPSG:4326; what is expected is read off that. */
const fixture = (name: string) => fileURLToPath(new URL(`../../test/fixtures/${name}`, import.meta.url));

afterAll(removeTemporary);

test("heights, place, and what is no height: nodata, and 32000 m", async () => {
  const terrain = await readTerrain(fixture("terrain.tif"));
  expect([terrain.crs, terrain.nx, terrain.ny]).toEqual(["EPSG:4326", 3, 2]);
  expect([terrain.west, terrain.north, terrain.cellWidth, terrain.cellHeight]).toEqual([7, 47, 0.5, 0.5]);
  expect([...terrain.heightAslM]).toEqual([100, 200, Number.NaN, 400, -5, Number.NaN]);
  expect(terrain.unknownCells).toBe(2);
});

test("a picture of another thing, no picture, and none at all are told", async () => {
  const [rain, text] = [fixture("grid-rate.tif"), temporaryPath("text.tif")];
  writeFileSync(text, "II*\0 heights");
  for (const [file, what] of [
    [rain, /unit/],
    [text, /damaged/],
    [temporaryPath("none.tif"), /cannot be opened/],
  ] as const) {
    const error = await readTerrain(file).then(
      () => undefined,
      (told: unknown) => told,
    );
    expect(error).toBeInstanceOf(InputError);
    expect((error as InputError).what).toMatch(what);
  }
});

test("100 damaged copies are read or refused, never worse", async () => {
  const sound = readFileSync(fixture("terrain.tif"));
  const draw = random(5);
  const file = temporaryPath("damaged.tif");
  let refused = 0;
  for (let copy = 0; copy < 100; copy++) {
    writeFileSync(file, mutant(sound, draw, 4));
    await readTerrain(file).catch((error: unknown) => {
      if (!(error instanceof InputError)) throw error;
      refused++;
    });
  }
  expect(refused).toBeGreaterThan(0);
});

test.runIf(FOREIGN_TOOLS)("feet and a scale, as GDAL writes them (RAINRECKON_FOREIGN_TOOLS=1)", async () => {
  const file = temporaryPath("feet.tif");
  copyFileSync(fixture("terrain.tif"), file);
  const feet = temporaryPath("scaled.tif");
  outputOf("gdal_translate", ["-q", "-a_scale", "2", "-a_offset", "10", file, feet]);
  expect((await readTerrain(feet)).heightAslM[0]).toBe(210);
});
