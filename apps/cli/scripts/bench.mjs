// Benches, as ratios in one run: `npm run bench [rate|decode|kriging|cost|memory|chain]`. Machines are noisy: read the ratios.
// What the steps from echo to rain cost: `npm run bench -- chain [--storm FOLDER]`, the demo's storm, made there once.
// And the chain from echo to rain held against the truth: `npm run bench -- ablation [--worlds …] [--seeds …]`;
// ways to adjust against the same truth: `npm run bench -- adjustment [--worlds …] [--seeds …]`;
// p10 to p90 of depths against the same truth: `npm run bench -- coverage [--worlds …] [--seeds …]`;
// verdicts on gauges against what was planted in them: `npm run bench -- faults [--worlds …] [--seeds …]`.
import { spawnSync } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import os from "node:os";
import path from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { build } from "esbuild";
import { pageScriptForBuild } from "../../../packages/report/scripts/page-script.mjs";

const root = fileURLToPath(new URL("../../..", import.meta.url));
const program = path.join(root, "apps/cli/dist/main.js");
const generator = path.join(root, "test-data/dist/storm.mjs");
const wanted = process.argv.slice(2);
const ablation = wanted[0] === "ablation";
const faults = wanted[0] === "faults";
const adjustment = wanted[0] === "adjustment";
const coverage = wanted[0] === "coverage";
const onWorlds = ablation || faults || adjustment || coverage;
const asked = (name) => wanted.length === 0 || (!onWorlds && wanted.includes(name));
for (const built of onWorlds ? [generator] : [program, generator]) {
  if (!existsSync(built))
    throw new Error(`${path.relative(root, built)} is missing: run npm test or npm run demo once`);
}
const PACKAGES = ["accumulation", "adjustment", "core", "formats", "mosaic", "report", "verification"];
const scratch = mkdtempSync(path.join(os.tmpdir(), "rainreckon-bench-"));
process.on("exit", () => rmSync(scratch, { recursive: true, force: true }));
console.log(
  `Node ${process.versions.node}, ${os.cpus().length} × ${os.cpus()[0].model}, load ${os.loadavg()[0].toFixed(1)}`,
);

/** A bench of a package, bundled and loaded. @returns its default export */
async function bundled(file, plugins = []) {
  // Beside the package, so that it finds the libraries the package has.
  const name = `.bench-${path.basename(file, ".ts")}-${process.pid}.mjs`;
  const out = path.join(root, path.dirname(file), "../node_modules", name);
  await build({
    entryPoints: [path.join(root, file)],
    outfile: out,
    bundle: true,
    format: "esm",
    platform: "node",
    target: "node20",
    packages: "external",
    alias: Object.fromEntries(
      PACKAGES.map((name) => [`@rainreckon/${name}`, path.join(root, "packages", name, "src/index.ts")]),
    ),
    plugins: [pageScriptForBuild, ...plugins],
    logLevel: "warning",
  });
  process.on("exit", () => rmSync(out, { force: true }));
  const { default: run } = await import(pathToFileURL(out));
  return run;
}

/** Runs a bench of a package, which gives a name and lines. */
async function packageBench(file) {
  const { name, lines } = await (await bundled(file))();
  console.log(`\n${name}`);
  for (const line of lines) console.log(`  ${line}`);
}

/** A folder of bench volumes with a plan, made once per size. */
const folders = new Map();
async function volumes(count) {
  if (!folders.has(count)) {
    const { generateBenchVolumes } = await import(pathToFileURL(generator));
    const folder = path.join(scratch, `v${count}`);
    await generateBenchVolumes({ folder, volumes: count });
    const plan = path.join(folder, "plan.yaml");
    must([program, "plan", path.join(folder, "radar"), "-o", plan, "--quiet"]);
    folders.set(count, plan);
  }
  return folders.get(count);
}

function must(args, env = {}) {
  const result = spawnSync(process.execPath, args, { encoding: "utf8", env: { ...process.env, ...env } });
  if (result.status !== 0) throw new Error(`${args.slice(0, 3).join(" ")}: ${result.stderr}`);
  return result;
}

/** Runs the main job on a plan; seconds by its own log, and the most memory it ever held. */
let runs = 0;
function total(plan) {
  const out = path.join(scratch, `run-${runs++}`);
  const peak = path.join(scratch, "peak");
  const hook = `data:text/javascript,import{writeFileSync}from"node:fs";process.on("exit",()=>writeFileSync(process.env.BENCH_PEAK,String(process.resourceUsage().maxRSS)))`;
  must(["--import", hook, program, "total", plan, "--out", out, "--quiet"], { BENCH_PEAK: peak });
  const log = JSON.parse(readFileSync(path.join(out, "run-log.json"), "utf8"));
  rmSync(out, { recursive: true });
  return { ...log, peakMb: Number(readFileSync(peak, "utf8")) / 1024 };
}

/** The ablation reckons a world in many ways: what opens scans is replaced by what keeps them decoded. */
const keptScans = {
  name: "kept-scans",
  setup({ onResolve }) {
    onResolve({ filter: /\/scans\/scan-files\.ts$/ }, ({ importer }) =>
      importer.endsWith("kept-scans.ts")
        ? undefined
        : { path: path.join(root, "apps/cli/bench/ablation/kept-scans.ts") },
    );
  },
};
if (ablation) await (await bundled("apps/cli/bench/ablation.ts", [keptScans]))(wanted.slice(1), generator);
if (faults) await (await bundled("apps/cli/bench/faults.ts"))(wanted.slice(1), generator);
if (adjustment) await (await bundled("apps/cli/bench/adjustment.ts"))(wanted.slice(1), generator);
if (coverage) await (await bundled("apps/cli/bench/coverage.ts"))(wanted.slice(1), generator);

const median = (values) => values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)];

if (asked("rate")) await packageBench("packages/core/bench/rate-table.ts");
if (asked("decode")) {
  process.env.RAINRECKON_BENCH_DIR = path.join(path.dirname(await volumes(288)), "radar");
  await packageBench("packages/formats/bench/decode.ts");
}

if (asked("kriging")) await packageBench("packages/adjustment/bench/local-kriging.ts");

if (asked("chain")) {
  const at = wanted.indexOf("--storm");
  const storm = at < 0 ? path.join(scratch, "storm") : path.resolve(wanted[at + 1]);
  const plan = path.join(storm, "plan.yaml");
  if (!existsSync(plan)) {
    must([generator, storm, "--preset", "demo"]);
    must([program, "plan", storm, "-o", plan, "--quiet"]);
  }
  await (await bundled("apps/cli/bench/chain.ts"))(plan);
}

// A script of another language's array libraries can do the plain decoding, as a floor that is not ours.
function decodeSeconds(folder, count) {
  const script = path.join(scratch, "decode.py");
  writeFileSync(
    script,
    `import sys, glob, time, h5py
files = sorted(glob.glob(sys.argv[1] + "/*.h5"))
start = time.perf_counter()
gates = 0
for name in files:
    with h5py.File(name, "r") as f:
        gates += f["dataset1/data1/data"][()].size
print(time.perf_counter() - start, len(files), gates)
`,
  );
  const result = spawnSync("/usr/bin/python3", [script, folder], { encoding: "utf8" });
  if (result.status !== 0) return undefined;
  const [seconds, files] = result.stdout.trim().split(" ").map(Number);
  if (files !== count) throw new Error(`decoded ${files} files of ${count}`);
  return seconds;
}

if (asked("cost")) {
  const few = await volumes(288);
  const many = await volumes(864);
  const costs = [];
  const floors = [];
  for (let round = 0; round < 3; round++) {
    const [a, b] = [total(few), total(many)];
    costs.push((b.indexSeconds + b.workSeconds - a.indexSeconds - a.workSeconds) / 576);
    const [fa, fb] = [few, many].map((plan, k) =>
      decodeSeconds(path.join(path.dirname(plan), "radar"), k === 0 ? 288 : 864),
    );
    if (fa !== undefined) floors.push((fb - fa) / 576);
  }
  console.log("\nMarginal cost of a volume: (864 volumes − 288 volumes) / 576, median of three, alternating");
  console.log(
    `  main job (hash, headers, lowest sweep, grid, integration): ${(1000 * median(costs)).toFixed(2)} ms`,
  );
  if (floors.length === 0) console.log("  decoding alone: python3-h5py is not here, no ratio");
  else {
    console.log(
      `  decoding the same lowest sweeps with native HDF5 alone: ${(1000 * median(floors)).toFixed(2)} ms`,
    );
    console.log(`  ratio: ${(median(costs) / median(floors)).toFixed(1)}`);
  }
}

if (asked("memory")) {
  const [few, many] = [await volumes(288), await volumes(1152)];
  const peaks = [few, many].map((plan) => median([0, 1, 2].map(() => total(plan).peakMb)));
  const allowed = 1.1 * peaks[0] + 20;
  console.log("\nPeak memory, median of three");
  console.log(`  288 scans ${peaks[0].toFixed(0)} MB, 1,152 scans ${peaks[1].toFixed(0)} MB`);
  console.log(
    `  allowed for 1,152: ${allowed.toFixed(0)} MB (10 % and 20 MB more): ${peaks[1] <= allowed ? "kept" : "EXCEEDED"}`,
  );
}
