import { spawnSync } from "node:child_process";
import { fileURLToPath } from "node:url";
import { vi } from "vitest";
import { runProgram } from "../src/program.ts";

/** The built command, as it is installed. */
export const MAIN = fileURLToPath(new URL("../dist/main.js", import.meta.url));

/** Builds the command where a source is newer than the build. */
export function ensureBuilt(): void {
  const script = fileURLToPath(new URL("../scripts/ensure-built.mjs", import.meta.url));
  const { status, stderr } = spawnSync(process.execPath, [script], { encoding: "utf8" });
  if (status !== 0) throw new Error(`the build failed:\n${stderr}`);
}

export interface CliResult {
  readonly status: number | null;
  readonly stdout: string;
  readonly stderr: string;
}

/** Runs the built command to its end. */
export function cli(args: readonly string[], cwd?: string, env: NodeJS.ProcessEnv = {}): CliResult {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, ...args], {
    encoding: "utf8",
    env: { ...process.env, ...env },
    ...(cwd === undefined ? {} : { cwd }),
    maxBuffer: 64 * 1024 * 1024,
  });
  return { status, stdout, stderr };
}

/**
 * The same command line without a process of its own, which takes most of a second to start: for the many
 * cases whose point is the message and the status.
 */
export async function inProcess(args: readonly string[]): Promise<CliResult> {
  const said = { stdout: "", stderr: "" };
  const listen = (stream: "stdout" | "stderr") =>
    vi.spyOn(process[stream], "write").mockImplementation((text) => {
      said[stream] += String(text);
      return true;
    });
  const spies = [listen("stdout"), listen("stderr")];
  try {
    const status = await runProgram(args);
    return { status, ...said };
  } finally {
    for (const spy of spies) spy.mockRestore();
  }
}
