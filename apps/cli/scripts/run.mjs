// `npm run rainreckon -- …`: builds where that is needed, then runs the command where the user stands.
import { spawn } from "node:child_process";
import { fileURLToPath } from "node:url";

await import("./ensure-built.mjs");

const main = fileURLToPath(new URL("../dist/main.js", import.meta.url));
const child = spawn(process.execPath, ["--enable-source-maps", main, ...process.argv.slice(2)], {
  stdio: "inherit",
  cwd: process.env.INIT_CWD ?? process.cwd(),
});
// The terminal sends its signal to the child as well, which knows what to do with it.
process.on("SIGINT", () => undefined);
child.on("exit", (code) => process.exit(code ?? 1));
