import { fileURLToPath } from "node:url";
import { defineConfig } from "vitest/config";
import { pageScriptForTests } from "../report/scripts/page-script.mjs";

const root = fileURLToPath(new URL("../..", import.meta.url));

/** One vitest start for the whole workspace: one summary, one count, never a cached pass. */
export default defineConfig({
  root,
  plugins: [pageScriptForTests],
  test: {
    include: [
      "packages/*/src/**/*.test.ts",
      "packages/*/test/**/*.test.ts",
      "apps/*/src/**/*.test.ts",
      "apps/*/test/**/*.test.ts",
      "test-data/**/*.test.ts",
    ],
    exclude: ["**/node_modules/**", "**/dist/**"],
    pool: "forks",
    testTimeout: 60_000,
    hookTimeout: 120_000,
    reporters: ["default", fileURLToPath(new URL("./plain-count-reporter.ts", import.meta.url))],
  },
});
