// `npm run rainreckon -- …`: builds when a source is newer than the build, then runs it where the user stands.
import { spawn, spawnSync } from "node:child_process";
import { readdirSync, statSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";

const cli = fileURLToPath(new URL("..", import.meta.url));
const workspace = path.join(cli, "..", "..");
const main = path.join(cli, "dist", "main.js");

/** Time of the newest file under a folder. */
function newest(folder) {
  let latest = 0;
  for (const entry of readdirSync(folder, { withFileTypes: true, recursive: true })) {
    if (entry.isFile())
      latest = Math.max(latest, statSync(path.join(entry.parentPath ?? entry.path, entry.name)).mtimeMs);
  }
  return latest;
}

const packages = readdirSync(path.join(workspace, "packages"));
const sources = [cli, ...packages.map((name) => path.join(workspace, "packages", name))]
  .map((folder) => path.join(folder, "src"))
  .filter((folder) => statSync(folder, { throwIfNoEntry: false })?.isDirectory());
const built = statSync(main, { throwIfNoEntry: false })?.mtimeMs ?? 0;
const changed = Math.max(statSync(path.join(cli, "package.json")).mtimeMs, ...sources.map(newest));
if (built < changed) {
  const { status } = spawnSync(process.execPath, [path.join(cli, "scripts", "build.mjs")], {
    stdio: "inherit",
  });
  if (status !== 0) process.exit(1);
}

const child = spawn(process.execPath, ["--enable-source-maps", main, ...process.argv.slice(2)], {
  stdio: "inherit",
  cwd: process.env.INIT_CWD ?? process.cwd(),
});
// The terminal sends its signal to the child as well, which knows what to do with it.
process.on("SIGINT", () => undefined);
child.on("exit", (code) => process.exit(code ?? 1));
