// Builds dist when it is missing, or older than any source that goes into it.
import { spawnSync } from "node:child_process";
import { readdirSync, statSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";

const cli = fileURLToPath(new URL("..", import.meta.url));
const workspace = path.join(cli, "..", "..");

/** Time of the newest file under a folder. */
function newest(folder) {
  let latest = 0;
  for (const entry of readdirSync(folder, { withFileTypes: true, recursive: true })) {
    // Tests are no part of the build.
    if (!entry.isFile() || entry.name.endsWith(".test.ts")) continue;
    const file = path.join(entry.parentPath ?? entry.path, entry.name);
    latest = Math.max(latest, statSync(file, { throwIfNoEntry: false })?.mtimeMs ?? 0);
  }
  return latest;
}

const packages = readdirSync(path.join(workspace, "packages"));
const sources = [cli, ...packages.map((name) => path.join(workspace, "packages", name))]
  .map((folder) => path.join(folder, "src"))
  .filter((folder) => statSync(folder, { throwIfNoEntry: false })?.isDirectory());
const built = statSync(path.join(cli, "dist", "main.js"), { throwIfNoEntry: false })?.mtimeMs ?? 0;
const changed = Math.max(statSync(path.join(cli, "package.json")).mtimeMs, ...sources.map(newest));
if (built < changed) {
  const { status } = spawnSync(process.execPath, [path.join(cli, "scripts", "build.mjs")], {
    stdio: ["ignore", 2, 2],
  });
  if (status !== 0) process.exit(1);
}
