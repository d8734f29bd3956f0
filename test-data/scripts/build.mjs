import { fileURLToPath } from "node:url";
import { build } from "esbuild";

// Node 20 runs no TypeScript: the generator becomes one module that is both a command and a library.
const here = (path) => fileURLToPath(new URL(path, import.meta.url));
await build({
  entryPoints: [here("../storm/src/main.ts")],
  outfile: here("../dist/storm.mjs"),
  bundle: true,
  platform: "node",
  format: "esm",
  target: "node20",
  external: ["h5wasm"],
  logLevel: "warning",
});
