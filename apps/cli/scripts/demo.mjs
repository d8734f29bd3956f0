// The demo: an invented storm, its plan, and the main job on it. Run by `npm run demo` at the root, after a build.
// With a folder as argument, everything is made there instead of in .demo.
import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";

const root = fileURLToPath(new URL("../../..", import.meta.url));
const shown = (target) => path.relative(process.cwd(), target) || ".";
const folder = path.resolve(process.argv[2] ?? path.join(root, ".demo"));
const storm = path.join(folder, "storm");
const program = path.join(root, "apps/cli/dist/main.js");
const generator = path.join(root, "test-data/dist/storm.mjs");

function run(script, args, stdout = "inherit") {
  const { status } = spawnSync(process.execPath, [script, ...args], {
    stdio: ["inherit", stdout, "inherit"],
  });
  if (status !== 0) process.exit(status ?? 1);
}

// The data are made beside their name and renamed, so that a broken-off demo leaves no half a storm.
if (!existsSync(path.join(storm, "truth/truth.json"))) {
  console.log("Making the demo data: an invented storm over an invented district, once.");
  mkdirSync(folder, { recursive: true });
  const beside = path.join(folder, "storm.part");
  rmSync(beside, { recursive: true, force: true });
  run(generator, [beside, "--preset", "demo"]);
  rmSync(storm, { recursive: true, force: true });
  renameSync(beside, storm);
}
const plan = path.join(storm, "plan.yaml");
if (!existsSync(plan)) {
  const title = "Invented storm over Saltermoor, 20 May 2031";
  run(program, ["plan", shown(storm), "-o", shown(plan), "--title", title, "--quiet"], "ignore");
  // What a hydrologist would mend by hand: this network's loggers keep standard time, one hour ahead of UTC.
  const text = readFileSync(plan, "utf8");
  const mended = text
    .replace(/^( {2}zone: )UTC # default.*$/m, "$1Europe/Amsterdam # the clock of the district's staff")
    .replace(
      /zone: UTC # guessed: the stamps name no zone: ask the network/,
      "zone: UTC+01:00 # said by the network",
    );
  if (mended === text) throw new Error("the plan is not written as the demo expects");
  writeFileSync(plan, mended);
}
run(program, ["total", shown(plan), "--out", shown(path.join(folder, "run"))]);
console.log(`
Everything here is invented. Next, try:
  npm run rainreckon -- survey ${shown(storm)}
  npm run rainreckon -- relate table
  npm run rainreckon -- total ${shown(plan)} --out ${shown(path.join(folder, "run"))} --dry-run`);
