import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { readTerrainProfile } from "./terrain-profile.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-terrain-"));
afterAll(() => rmSync(scratch, { recursive: true }));

function profile(text: string): string {
  const file = path.join(scratch, "profile.csv");
  writeFileSync(file, text);
  return file;
}

test("points by their columns; an empty height is not known", () => {
  const read = readTerrainProfile(profile("\ufeffheight_asl_m, distance_km\r\n10,0.5\r\n,1\r\n-2.5,1.5\r\n"));
  expect(read.stepM).toBe(500);
  expect([...read.heightAslM]).toEqual([10, Number.NaN, -2.5]);
});

test.each([
  ["km,m\n1,0\n2,0\n", /no columns/, /line 1$/],
  ["distance_km,height_asl_m\n1,0\n", /no profile/, /line 2$/],
  ["distance_km,height_asl_m\n1,0\n2,high\n", /without numbers/, /line 3$/],
  ["distance_km,height_asl_m\n1,0\n,5\n", /without numbers/, /line 3$/],
  ["distance_km,height_asl_m\n0,0\n1,0\n", /even steps/, /line 2$/],
  ["distance_km,height_asl_m\n1,0\n2,0\n4,0\n", /even steps/, /line 4$/],
  ["distance_km,height_asl_m\n2,0\n1,0\n", /even steps/, /line \d$/],
])("%j is told with its line", (text, what, where) => {
  try {
    readTerrainProfile(profile(text));
    expect.fail("it was read");
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    expect((error as InputError).what).toMatch(what);
    expect((error as InputError).where).toMatch(where);
    expect((error as InputError).kind).toBe("usage");
  }
});
