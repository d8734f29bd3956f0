import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { runStormCommand } from "./cli.ts";
import { FROZEN, truthDigest } from "./frozen.ts";
import { generateStorm } from "./generate.ts";
import { WORLDS, worldStorm } from "./worlds.ts";

const folder = mkdtempSync(join(tmpdir(), "worlds-"));
const falseEcho = join(folder, "false-echo");
const blocked = join(folder, "blocked-sector");

beforeAll(async () => {
  await generateStorm({ ...worldStorm("false-echo", 11), folder: falseEcho, gates: true });
  await generateStorm({ ...worldStorm("blocked-sector", 1), folder: blocked });
}, 60_000);
afterAll(() => {
  rmSync(folder, { recursive: true });
});

function read<T>(...path: string[]): T {
  return JSON.parse(readFileSync(join(...path), "utf8")) as T;
}

test("every world has its digests for seeds 1 and 11", () => {
  expect(Object.keys(FROZEN)).toEqual(WORLDS.map(({ name }) => name));
  const digests = Object.values(FROZEN).flatMap((of) => [of[1], of[11]]);
  expect(digests.every((digest) => /^[0-9a-f]{64}$/.test(digest))).toBe(true);
  expect(new Set(digests).size).toBe(2 * WORLDS.length);
});

// The digests were taken without the file of gates: that the first of these has one makes no difference.
test.each([
  ["false-echo", 11, falseEcho],
  ["blocked-sector", 1, blocked],
] as const)("%s, seed %d, is the world that was frozen", (name, seed, made) => {
  const why = "this world has changed: what was measured in it before no longer holds for it";
  expect(truthDigest(made), why).toBe(FROZEN[name]?.[seed]);
});

describe("the truth of a world", () => {
  interface Told {
    readonly world: {
      readonly name: string;
      readonly planted: readonly string[];
      readonly turbineGates: readonly {
        readonly node: string;
        readonly elevationDeg: number;
        readonly gates: readonly { readonly azimuthDeg: number; readonly rangeM: number }[];
      }[];
      readonly interference: readonly {
        readonly node: string;
        readonly start: string;
        readonly azimuthsDeg: readonly number[];
      }[];
    };
  }
  interface Gates {
    readonly flags: Readonly<Record<string, number>>;
    readonly radars: readonly {
      readonly node: string;
      readonly file: string;
      readonly gateCount: number;
      readonly gateM: number;
      readonly sweeps: readonly {
        readonly start: string;
        readonly elevationDeg: number;
        readonly byteOffset: number;
      }[];
    }[];
  }

  test("gates flagged as turbines and interference are those that truth.json tells, in every sweep", () => {
    const { world } = read<Told>(falseEcho, "truth", "truth.json");
    const gates = read<Gates>(falseEcho, "truth", "gates.json");
    expect(world.name).toBe("false-echo");
    expect(world.interference.length).toBeGreaterThan(20);
    for (const { node, file, gateCount, gateM, sweeps } of gates.radars) {
      const bytes = gunzipSync(readFileSync(join(falseEcho, "truth", file)));
      const count = 360 * gateCount;
      expect(bytes.length).toBe(sweeps.length * count * 5);
      for (const { start, elevationDeg, byteOffset } of sweeps) {
        const flags = bytes.subarray(byteOffset + 4 * count, byteOffset + 5 * count);
        const spikes = world.interference.find((hit) => hit.node === node && hit.start === start);
        const spiked = new Set<number>();
        const turbines: { azimuthDeg: number; rangeM: number }[] = [];
        flags.forEach((flag, index) => {
          const azimuthDeg = Math.floor(index / gateCount) + 0.5;
          if (flag & gates.flags.interference!) spiked.add(azimuthDeg);
          if (flag & gates.flags.turbine!) {
            turbines.push({ azimuthDeg, rangeM: ((index % gateCount) + 0.5) * gateM });
          }
        });
        expect([...spiked]).toEqual((spikes?.azimuthsDeg ?? []).toSorted((a, b) => a - b));
        expect(turbines).toEqual(
          world.turbineGates.find((at) => at.node === node && at.elevationDeg === elevationDeg)?.gates,
        );
      }
    }
  });

  test("rain below the gates is that of the grid: the means over the district agree within a tenth", () => {
    const { radars } = read<Gates>(falseEcho, "truth", "gates.json");
    const { file, gateCount, gateM, sweeps } = radars.find(({ node }) => node === "zzmoo")!;
    const bytes = gunzipSync(readFileSync(join(falseEcho, "truth", file)));
    const rates = gunzipSync(readFileSync(join(falseEcho, "truth", "rain_rate.u16.gz")));
    // A disc of 15 km around the radar at 10 km east, 12 km north, half way through the storm.
    const sweep = sweeps.findIndex(
      ({ elevationDeg, start }) => elevationDeg === 0.5 && start.includes("T13:03"),
    );
    let belowGates = 0;
    let area = 0;
    const plane = sweeps[sweep]!.byteOffset + 2 * 360 * gateCount;
    for (let ray = 0; ray < 360; ray++) {
      for (let gate = 0; (gate + 1) * gateM <= 15_000; gate++) {
        belowGates += (gate + 0.5) * bytes.readUInt16LE(plane + 2 * (ray * gateCount + gate));
        area += gate + 0.5;
      }
    }
    const minute = Math.floor(
      (Date.parse(sweeps[sweep]!.start) + 10_000 - Date.UTC(2031, 4, 20, 12)) / 60_000,
    );
    let onGrid = 0;
    let cells = 0;
    for (let row = 0; row < 60; row++) {
      for (let column = 0; column < 60; column++) {
        if (Math.hypot(column - 29.5 - 10, 29.5 - row - 12) > 15) continue;
        onGrid += rates.readUInt16LE(2 * (minute * 3600 + row * 60 + column));
        cells += 1;
      }
    }
    expect(onGrid).toBeGreaterThan(0);
    expect(Math.abs(belowGates / area / (onGrid / cells) - 1)).toBeLessThan(0.1);
  });
});

test("worlds are listed, and options that do not fit together end with the usage and status 2", async () => {
  expect(await runStormCommand(["--list"])).toBe(0);
  expect(await runStormCommand([folder, "--world", "hail", "--preset", "demo"])).toBe(2);
  expect(await runStormCommand([folder, "--world", "hail", "--size", "huge"])).toBe(2);
  expect(await runStormCommand([folder, "--size", "full"])).toBe(2);
  expect(await runStormCommand([folder, "--world", "hail", "--seed", "one"])).toBe(2);
});
