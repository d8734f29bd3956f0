import { readdirSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, test } from "vitest";
import { exportedNames, importsOf, PACKAGES, ROOT, type Source, sourcesOf } from "./sources.ts";

/** Each package with the packages of ours that it may import: the arrows of the architecture, and no other. */
const MAY_IMPORT: Readonly<Record<string, readonly string[]>> = {
  core: [],
  mosaic: ["core"],
  accumulation: ["mosaic", "core"],
  verification: ["accumulation", "mosaic", "core"],
  adjustment: ["verification", "accumulation", "mosaic", "core"],
  report: ["adjustment", "verification", "accumulation", "mosaic", "core"],
  formats: ["core"],
  "test-data": [],
  cli: ["core", "mosaic", "accumulation", "verification", "adjustment", "report", "formats"],
};

/** Published libraries by package. What is not here, nobody agreed to. */
const LIBRARIES: Readonly<Record<string, readonly string[]>> = {
  core: [],
  mosaic: ["proj4", "epsg-index", "geographiclib-geodesic"],
  accumulation: ["luxon", "simple-statistics", "d3-contour"],
  verification: ["simple-statistics", "zod"],
  adjustment: ["simple-statistics"],
  report: ["d3-array", "d3-interpolate", "d3-scale", "d3-scale-chromatic", "d3-shape", "luxon"],
  formats: [
    "geotiff",
    "h5wasm",
    "hyparquet-writer",
    "luxon",
    "papaparse",
    "saxes",
    "seek-bzip",
    "shapefile",
    "sql.js",
    "zod",
  ],
  "test-data": ["h5wasm", "vitest"],
  cli: [
    "cli-progress",
    "cli-table3",
    "commander",
    "luxon",
    "picocolors",
    "piscina",
    "tinyglobby",
    "yaml",
    "zod",
  ],
};

const OWNERS = Object.keys(MAY_IMPORT);
const SOURCES = new Map(OWNERS.map((owner) => [owner, sourcesOf(owner)]));

test("every package is known here", () => {
  expect([...PACKAGES, "test-data", "cli"].sort()).toEqual([...OWNERS].sort());
});

describe.each(OWNERS)("%s", (owner) => {
  const sources = SOURCES.get(owner)!;

  test("imports only what lies below it, and only through the front door", () => {
    const allowed = new Set(MAY_IMPORT[owner]!.map((name) => `@rainreckon/${name}`));
    const strays = imports(sources, (name) => name.startsWith("@rainreckon/") && !allowed.has(name));
    expect(strays).toEqual([]);
  });

  test("reaches into no other package by a path", () => {
    const home = owner === "cli" ? "apps/cli" : owner === "test-data" ? "test-data" : `packages/${owner}`;
    const strays = sources.flatMap(({ file, code }) =>
      importsOf(code)
        .filter((name) => name.startsWith("."))
        .filter((name) => !path.posix.join(path.posix.dirname(file), name).startsWith(`${home}/`))
        .map((name) => `${file}: ${name}`),
    );
    expect(strays).toEqual([]);
  });

  test("uses only the libraries agreed on", () => {
    const allowed = LIBRARIES[owner]!;
    const strays = imports(sources, (name) => {
      if (name.startsWith(".") || name.startsWith("node:") || name.startsWith("@rainreckon/")) return false;
      return !allowed.some((library) => name === library || name.startsWith(`${library}/`));
    });
    expect(strays).toEqual([]);
  });
});

/** Things that only some packages may do, and how they look in code. */
const RESERVED: readonly {
  what: string;
  pattern: RegExp;
  owners: readonly string[];
  except?: readonly string[];
}[] = [
  { what: "touches files", pattern: /["']node:fs(\/promises)?["']/, owners: ["formats", "cli", "test-data"] },
  { what: "opens HDF5", pattern: /["']h5wasm(\/node)?["']/, owners: ["formats", "test-data"] },
  {
    what: "lists, renames or removes files",
    pattern:
      /\b(readdir|readdirSync|opendir|rename|renameSync|rm|rmSync|unlink|unlinkSync|mkdir|mkdirSync|mkdtempSync)\(/,
    owners: ["cli", "test-data"],
  },
  { what: "prints", pattern: /\bconsole\.\w+\(|\bprocess\.(stdout|stderr)\b/, owners: ["cli", "test-data"] },
  { what: "exits", pattern: /\bprocess\.(exit\(|exitCode|abort\(|kill\()/, owners: ["cli", "test-data"] },
  { what: "reads the environment", pattern: /\bprocess\.(env|argv|cwd\()/, owners: ["cli", "test-data"] },
  {
    what: "reads the clock",
    pattern:
      /\bDate\.now\(|\bnew Date\(\s*\)|\bDateTime\.(now|local|utc)\(\s*\)|\bperformance\.now\(|\bhrtime\b/,
    owners: ["cli", "test-data"],
  },
  {
    what: "draws numbers that no seed rules",
    pattern: /\bMath\.random\(|\brandomBytes\(|\brandomUUID\(/,
    owners: [],
  },
];

describe.each(RESERVED)("$what", ({ pattern, owners }) => {
  test(`only ${owners.join(", ") || "nobody"}`, () => {
    const strays = OWNERS.filter((owner) => !owners.includes(owner))
      .flatMap((owner) => SOURCES.get(owner)!)
      .filter(({ code }) => pattern.test(code))
      .map(({ file }) => file);
    expect(strays).toEqual([]);
  });
});

test("the command line exits in one place only", () => {
  const places = SOURCES.get("cli")!
    .filter(({ code }) => /\bprocess\.exit\(/.test(code))
    .map(({ file }) => file);
  expect(places).toEqual(["apps/cli/src/main.ts"]);
});

test("what each package offers is what public-names.json lists", () => {
  const listFile = path.join(ROOT, "apps/cli/test/public-names.json");
  const offered = Object.fromEntries(
    [...PACKAGES]
      .sort()
      .map((name) => [name, exportedNames(path.join(ROOT, "packages", name, "src/index.ts"))]),
  );
  // Set on purpose, after a look at the difference, when a name was added or taken away.
  if (process.env.RAINRECKON_WRITE_PUBLIC_NAMES === "1") {
    writeFileSync(listFile, `${JSON.stringify(offered, null, 2)}\n`);
  }
  expect(offered).toEqual(JSON.parse(readFileSync(listFile, "utf8")));
});

test("an index holds the public names and nothing else", () => {
  for (const name of PACKAGES) {
    const text = readFileSync(path.join(ROOT, "packages", name, "src/index.ts"), "utf8");
    const rest = text
      .replace(/\/\*[\s\S]*?\*\/|\/\/[^\n]*/g, "")
      .replace(/export\s+(type\s+)?(\{[^}]*\}|\*)\s+from\s+["'][^"']+["'];/g, "");
    expect(rest.trim(), name).toBe("");
  }
});

test("the root holds what it must, and nothing else but dot files", () => {
  const shown = readdirSync(ROOT)
    .filter((name) => !name.startsWith(".") && name !== "node_modules")
    .sort();
  expect(shown).toEqual([
    "DEVELOPERS.md",
    "LICENSE",
    "README.md",
    "apps",
    "package.json",
    "packages",
    "pnpm-lock.yaml",
    "pnpm-workspace.yaml",
    "test-data",
    "turbo.json",
  ]);
});

test.each(PACKAGES)("%s has a README with an example that a test of its own runs", (name) => {
  const home = path.join(ROOT, "packages", name);
  expect(readFileSync(path.join(home, "README.md"), "utf8")).toMatch(/```ts\n[\s\S]+?```/);
  const readers = readdirSync(path.join(home, "src"), { recursive: true, encoding: "utf8" })
    .filter((file) => file.endsWith(".test.ts"))
    .filter((file) => readFileSync(path.join(home, "src", file), "utf8").includes("README.md"));
  expect(readers).not.toEqual([]);
});

test("every dependency is pinned to one version", () => {
  const folders = [...PACKAGES.map((name) => `packages/${name}`), "apps/cli", "test-data", "."];
  for (const folder of folders) {
    const card = JSON.parse(readFileSync(path.join(ROOT, folder, "package.json"), "utf8")) as Record<
      string,
      unknown
    >;
    for (const kind of ["dependencies", "devDependencies"]) {
      for (const [name, wanted] of Object.entries((card[kind] ?? {}) as Record<string, string>)) {
        expect(wanted, `${folder}: ${name}`).toMatch(/^(\d+\.\d+\.\d+(-[\w.]+)?|workspace:\*)$/);
      }
    }
  }
});

function imports(sources: readonly Source[], wrong: (name: string) => boolean): string[] {
  return sources.flatMap(({ file, code }) =>
    importsOf(code)
      .filter(wrong)
      .map((name) => `${file}: ${name}`),
  );
}
