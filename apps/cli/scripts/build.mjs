// Bundles the command line into dist/: our own packages inside, published libraries outside.
import { chmodSync, existsSync, mkdirSync, mkdtempSync, readFileSync, renameSync, rmSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";
import { pageScriptForBuild } from "../../../packages/report/scripts/page-script.mjs";

const root = fileURLToPath(new URL("..", import.meta.url));
const { dependencies } = JSON.parse(readFileSync(path.join(root, "package.json"), "utf8"));
const entryPoints = ["src/main.ts", "src/total/unit-worker.ts"].filter((entry) =>
  existsSync(path.join(root, entry)),
);

/**
 * Says of every module of ours that it does nothing when it is merely imported, which is so: then what a command
 * does not use is not loaded, HDF5 and projections among it, and help answers at once.
 */
const onlyWhatIsUsed = {
  name: "only-what-is-used",
  setup({ onResolve, resolve }) {
    onResolve({ filter: /^(\.|@rainreckon\/)/ }, async ({ path: wanted, pluginData, ...from }) => {
      if (pluginData === "asked") return undefined;
      const found = await resolve(wanted, { ...from, pluginData: "asked" });
      return found.errors.length > 0 ? found : { ...found, sideEffects: false };
    });
  },
};

// Written beside dist and moved over it whole, so that nobody ever starts half a build.
const cache = path.join(root, "node_modules", ".cache");
mkdirSync(cache, { recursive: true });
const fresh = mkdtempSync(path.join(cache, "dist-"));
try {
  const { metafile } = await build({
    absWorkingDir: root,
    entryPoints,
    entryNames: "[name]",
    chunkNames: "part-[hash]",
    outdir: fresh,
    bundle: true,
    splitting: true,
    format: "esm",
    platform: "node",
    target: "node20",
    plugins: [pageScriptForBuild, onlyWhatIsUsed],
    external: Object.keys(dependencies),
    banner: { js: "#!/usr/bin/env node" },
    sourcemap: true,
    metafile: true,
    logLevel: "warning",
  });
  // A library that the package does not declare would be missing, or doubled, where it is installed.
  const strays = Object.keys(metafile.inputs).filter((input) => input.includes("node_modules/"));
  if (strays.length > 0) throw new Error(`not declared in apps/cli/package.json: ${strays.join(", ")}`);
  chmodSync(fresh, 0o755);
  const dist = path.join(root, "dist");
  const old = path.join(cache, `old-${process.pid}`);
  if (existsSync(dist)) renameSync(dist, old);
  renameSync(fresh, dist);
  rmSync(old, { recursive: true, force: true });
} catch (error) {
  rmSync(fresh, { recursive: true, force: true });
  console.error(error instanceof Error ? error.message : error);
  process.exit(1);
}
