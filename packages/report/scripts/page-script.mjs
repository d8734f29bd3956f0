// The page's script, bundled to one string. A module asks for it as "./page/main.ts?bundled"; the plugins below
// answer, one for the build of the command line and one for the test runner.
import path from "node:path";
import { build } from "esbuild";

const ASKED = /\?bundled$/;

/** @returns the files that went in, and the module that hands the script out */
async function bundle(entry) {
  const { outputFiles, metafile } = await build({
    absWorkingDir: path.dirname(entry),
    entryPoints: [entry],
    bundle: true,
    write: false,
    metafile: true,
    minify: true,
    format: "iife",
    platform: "browser",
    target: ["chrome103", "firefox113", "safari16.4"],
    charset: "ascii",
    legalComments: "none",
    logLevel: "warning",
  });
  return {
    files: Object.keys(metafile.inputs).map((file) => path.resolve(path.dirname(entry), file)),
    module: `export default ${JSON.stringify(outputFiles[0].text.trimEnd())};`,
  };
}

/** For esbuild. */
export const pageScriptForBuild = {
  name: "page-script",
  setup({ onResolve, onLoad }) {
    onResolve({ filter: ASKED }, ({ path: asked, resolveDir }) => ({
      path: path.resolve(resolveDir, asked.replace(ASKED, "")),
      namespace: "page-script",
      sideEffects: false,
    }));
    onLoad({ filter: /.*/, namespace: "page-script" }, async ({ path: entry }) => {
      const { files, module } = await bundle(entry);
      return { contents: module, loader: "js", watchFiles: files };
    });
  },
};

/** For vite, and so for vitest. */
export const pageScriptForTests = {
  name: "page-script",
  enforce: "pre",
  async load(id) {
    if (!ASKED.test(id)) return undefined;
    const entry = id.replace(ASKED, "");
    const { files, module } = await bundle(entry);
    for (const file of files) this.addWatchFile(file);
    return module;
  },
};
