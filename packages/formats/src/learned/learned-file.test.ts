import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { afterAll, describe, expect, test } from "vitest";
import { readLearned, writeLearned } from "./learned-file.ts";

const folder = mkdtempSync(path.join(os.tmpdir(), "learned-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const VALUES = {
  zzsal: {
    systemPhaseDeg: 41.25,
    none: null,
    unknown: Number.NaN,
    basis: "measured",
    used: true,
    sweeps: [
      {
        elevationDeg: 0.5,
        share: Uint8Array.of(0, 3, 255),
        lossDb: Float32Array.of(1.5, Number.NaN),
        codes: Uint16Array.of(65535),
        cells: Int32Array.of(-1, 2),
        heightsM: Float64Array.of(0.1),
        nothing: new Float32Array(0),
      },
    ],
  },
} as const;

describe("a learned file", () => {
  test("gives back every number, word and array", async () => {
    const file = path.join(folder, "a.nc");
    await writeLearned(file, VALUES, { title: "test" });
    expect(await readLearned(file)).toEqual(VALUES);
  });

  test("is the same bytes for the same values", async () => {
    const [one, other] = [path.join(folder, "b.nc"), path.join(folder, "c.nc")];
    await writeLearned(one, VALUES, { title: "test" });
    await writeLearned(other, VALUES, { title: "test" });
    expect(readFileSync(one).equals(readFileSync(other))).toBe(true);
  });

  test.skipIf(process.env.RAINRECKON_FOREIGN_TOOLS !== "1")("opens in ncdump", async () => {
    const file = path.join(folder, "d.nc");
    await writeLearned(file, VALUES, { title: "test" });
    const text = execFileSync("ncdump", ["-v", "zzsal_sweeps_0_share", file], { encoding: "utf8" });
    expect(text).toContain("zzsal_sweeps_0_share = 0, 3, 255 ;");
  });

  test("refuses what it did not write", async () => {
    const file = path.join(folder, "e.nc");
    writeFileSync(file, "no HDF5");
    await expect(readLearned(file)).rejects.toThrow("not an HDF5 file");
  });
});
