// Prints how many published check values the tests exercise, topic by topic. It counts what ran and
// passed in this very run, from the test runner's own record; nothing is taken from a list.
import { spawnSync } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

const MEASURED_PREFIX = "published values: ";
const SANITY_PREFIX = "sanity range: ";
const BINDING = /^(published table|worked example|closed form|computed independently)/;

const root = fileURLToPath(new URL("../..", import.meta.url));
const published = new URL("../published/", import.meta.url);
const readJson = (name) => JSON.parse(readFileSync(new URL(name, published), "utf8"));
const books = ["radar-physics", "verification-and-merging"].map((book) => [book, readJson(`${book}.json`)]);
const due = readJson("due.json");

const run = runSuites();
const measured = readRun(run);

let unanswered = 0;
for (const [book, entries] of books) {
  console.log(`\n${book}: ${entries.length} values`);
  const notDue = [];
  for (const topic of new Set(entries.map((entry) => entry.topic))) {
    const ofTopic = entries.filter((entry) => entry.topic === topic);
    const binding = ofTopic.filter(({ kind }) => BINDING.test(kind));
    const exercised = binding.filter(({ id }) => measured.passed.has(id));
    const excused = binding.filter(({ id }) => measured.notApplicable.has(id));
    const sanity = ofTopic.filter((entry) => !BINDING.test(entry.kind) && measured.passed.has(entry.id));
    if (!due.includes(topic)) {
      const early = exercised.length > 0 ? ` (${exercised.length} exercised already)` : "";
      notDue.push(`${topic}: ${ofTopic.length}${early}`);
      continue;
    }
    const open = binding.filter((entry) => !exercised.includes(entry) && !excused.includes(entry));
    unanswered += open.length;
    console.log(
      `  ${topic}: ${ofTopic.length} values, ${binding.length} binding: ` +
        `${exercised.length} exercised, ${excused.length} not applicable, ${open.length} unanswered; ` +
        `${sanity.length} of ${ofTopic.length - binding.length} others as sanity ranges`,
    );
    for (const [reason, ids] of byReason(excused))
      console.log(`    not applicable, ${ids.length}: ${reason} (${some(ids)})`);
    if (open.length > 0) console.log(`    unanswered: ${some(open.map(({ id }) => id))}`);
  }
  if (notDue.length > 0) console.log(`  not yet due: ${notDue.join("; ")}`);
}

const isExercised = ({ id }) => measured.passed.has(id);
const all = books.flatMap(([, entries]) => entries);
const binding = all.filter(({ kind }) => BINDING.test(kind));
const sanity = all.filter(({ kind }) => !BINDING.test(kind));
console.log(
  `\n${binding.filter(isExercised).length} of ${binding.length} binding values exercised ` +
    `(and ${sanity.filter(isExercised).length} sanity ranges), ${measured.failed.size} failed, ` +
    `${binding.filter(({ id }) => measured.notApplicable.has(id)).length} not applicable, ${unanswered} due and unanswered`,
);
for (const id of measured.failed) console.log(`failed: ${id}`);
if (!run.success) console.log("the run of the suites did not pass; run `npm test` for its messages");
process.exitCode = run.success && unanswered === 0 ? 0 : 1;

/** One run of every suite of check values, in the record that the runner writes for machines. */
function runSuites() {
  const vitest = join(root, "node_modules", "vitest", "vitest.mjs");
  if (!existsSync(vitest)) {
    console.error("the test runner is not installed; run `npm test` once, then `npm run reference`");
    process.exit(1);
  }
  const folder = mkdtempSync(join(tmpdir(), "reference-"));
  try {
    const outputFile = join(folder, "run.json");
    const config = join(root, "packages", "config", "vitest.config.ts");
    const { stderr } = spawnSync(
      process.execPath,
      [vitest, "run", "--config", config, "--reporter=json", `--outputFile=${outputFile}`, "src/reference"],
      { cwd: root, encoding: "utf8" },
    );
    if (!existsSync(outputFile)) {
      console.error(`the suites of check values did not run:\n${stderr}`);
      process.exit(1);
    }
    return JSON.parse(readFileSync(outputFile, "utf8"));
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** Ids that passed and failed, and the reasons that suites gave for entries they leave out. */
function readRun({ testResults }) {
  const passed = new Set();
  const failed = new Set();
  const notApplicable = new Map();
  for (const test of testResults.flatMap((file) => file.assertionResults)) {
    if (!test.ancestorTitles.some((title) => title.startsWith(MEASURED_PREFIX))) continue;
    for (const { id, reason } of test.meta.notApplicable ?? []) notApplicable.set(id, reason);
    const id = test.title.replace(SANITY_PREFIX, "");
    if (id.startsWith("the suite ")) continue;
    (test.status === "passed" ? passed : failed).add(id);
  }
  return { passed, failed, notApplicable };
}

/** The first few of many ids, and how many more. */
function some(ids) {
  const shown = ids.slice(0, 6).join(", ");
  return ids.length > 6 ? `${shown} and ${ids.length - 6} more` : shown;
}

function byReason(entries) {
  const groups = new Map();
  for (const { id } of entries) {
    const reason = measured.notApplicable.get(id);
    groups.set(reason, [...(groups.get(reason) ?? []), id]);
  }
  return groups;
}
