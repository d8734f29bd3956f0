import { realpathSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { runStormCommand } from "./cli.ts";

export * from "./index.ts";

// The bundle is both a command and a module for scripts: it acts only when it was started itself.
const started = process.argv[1];
if (started !== undefined && realpathSync(started) === fileURLToPath(import.meta.url)) {
  process.exitCode = await runStormCommand(process.argv.slice(2));
}
