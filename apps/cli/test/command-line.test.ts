import { spawn, spawnSync } from "node:child_process";
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { z } from "zod";
import { schemas } from "../src/schemas.ts";
import { type CliResult, cli, ensureBuilt, inProcess, MAIN } from "./run-cli.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-line-"));
beforeAll(ensureBuilt);
afterAll(() => rmSync(scratch, { recursive: true }));

/** Three lines: what, where, what to do. Nothing on stdout. */
async function expectFault(
  args: readonly string[],
  status: number,
  what: RegExp,
  fix: RegExp,
  run: (args: readonly string[]) => CliResult | Promise<CliResult> = inProcess,
) {
  const result = await run(args);
  expect(result.stderr).toMatch(/^error: .+\n {2}where: .+\n {2}fix: {3}.+\n$/);
  const [first, , third] = result.stderr.split("\n");
  expect(first).toMatch(what);
  expect(third).toMatch(fix);
  expect(result.stdout).toBe("");
  expect(result.status).toBe(status);
}

describe("wrong usage: exit 2, three lines, the nearest thing that exists", () => {
  test.each([
    [[], /a command is missing/, /survey, plan/],
    [["surwey", "."], /no command "surwey"/, /did you mean "survey"/],
    [["relate"], /a command is missing/, /table/],
    [["relate", "tabel"], /no command "tabel"/, /did you mean "table"/],
    [["relate", "table", "--jsn"], /no flag --jsn/, /did you mean --json/],
    [["survey", ".", "--quite"], /no flag --quite/, /did you mean --quiet/],
    [["survey"], /rainreckon survey needs a <path>/, /survey --help/],
    [["compare", "a"], /rainreckon compare needs a <dir-b>/, /compare --help/],
    [["relate", "table", "--dbz", "many"], /'many' does not fit/, /15\.\.60/],
    [["relate", "table", "--dbz", "10..1000"], /does not fit/, /-40 and 90 dBZ/],
    [["relate", "table", "--cap", "53"], /'53' does not fit/, /53dBZ/],
    [
      ["relate", "table", "--relation", "marshal-1955-200/1.6"],
      /no relation is called/,
      /marshall-1955-200\/1\.6/,
    ],
    [["relate", "table", "--relation", "200,-1"], /no relation/, /both above 0/],
    [["survey", "nowhere"], /no such file or folder/, /that exist/],
    [["plan", "nowhere"], /no such file or folder/, /that exist/],
    [["plan", ".", "--out"], /argument missing/, /plan --help/],
  ] as const)("%j", (args, what, fix) => expectFault(args, 2, what, fix));

  test("and so does the built command", () =>
    expectFault(["surwey"], 2, /no command "surwey"/, /"survey"/, cli));
});

test("no usable input is exit 3", async () => {
  const empty = path.join(scratch, "empty");
  mkdirSync(empty, { recursive: true });
  writeFileSync(path.join(empty, "note.txt"), "nothing to see\n");
  await expectFault(["plan", empty, "-o", "never.yaml", "--quiet"], 3, /no scan that can be read/, /ODIM_H5/);
  const surveyed = await inProcess(["survey", empty]);
  expect(surveyed.status).toBe(3);
  expect(surveyed.stdout).toContain("1 file under");
  expect(surveyed.stderr).toContain("error: nothing here can be read");
});

test("the stack is shown under --debug and only there", async () => {
  expect((await inProcess(["survey", "nowhere", "--debug"])).stderr).toMatch(/\n {4}at /);
  expect((await inProcess(["survey", "nowhere"])).stderr).not.toMatch(/\n {4}at /);
});

test("--version is the package's version", () => {
  const card = JSON.parse(readFileSync(new URL("../package.json", import.meta.url), "utf8")) as {
    version: string;
  };
  expect(cli(["--version"])).toEqual({ status: 0, stdout: `${card.version}\n`, stderr: "" });
});

describe.each([
  ["survey"],
  ["plan"],
  ["total"],
  ["event"],
  ["compare"],
  ["relate", "table"],
  ["relate", "fit"],
  ["relate", "rank"],
])("%s %s", (...name) => {
  const command = name.filter((word) => word !== undefined);

  test("helps on stdout, with examples and the flags of all commands", async () => {
    const { status, stdout, stderr } = await inProcess([...command, "--help"]);
    expect(status).toBe(0);
    expect(stderr).toBe("");
    expect(stdout).toMatch(new RegExp(`Examples:\n {2}rainreckon ${command.join(" ")}\\b`));
    for (const flag of ["--json", "--quiet", "--debug", "--no-color", "--schema"])
      expect(stdout).toContain(flag);
  });

  test("prints the schema of its JSON, as it is exported", async () => {
    const { status, stdout } = await inProcess([...command, "--schema"]);
    expect(status).toBe(0);
    const exported = schemas[command.join(" ") as keyof typeof schemas];
    expect(JSON.parse(stdout)).toEqual(JSON.parse(JSON.stringify(z.toJSONSchema(exported))));
  });
});

test("a flag of all commands may stand before the command or behind it", async () => {
  const before = await inProcess(["--json", "relate", "table"]);
  const behind = await inProcess(["relate", "table", "--json"]);
  expect(before.stdout).toBe(behind.stdout);
  expect(JSON.parse(before.stdout)).toHaveProperty("relations");
});

test("off a terminal nothing is coloured and no progress is drawn, whatever the environment wishes", () => {
  const { stdout, stderr } = cli(["survey", scratch], undefined, { FORCE_COLOR: "1" });
  expect(stdout + stderr).not.toContain("\u001b");
});

test("a reader that stops early ends the command quietly", () => {
  const shell = `"${process.execPath}" "${MAIN}" relate table --json --dbz 0..80..0.25; echo "status $?" >&2`;
  const { stderr } = spawnSync("sh", ["-c", `{ ${shell}; } | head -c 10 >/dev/null`], { encoding: "utf8" });
  expect(stderr).toBe("status 0\n");
});

test("an interrupt ends the command with 130", async () => {
  const many = path.join(scratch, "many");
  mkdirSync(many);
  for (let index = 0; index < 4000; index += 1) writeFileSync(path.join(many, `${index}.txt`), "word\n");
  const child = spawn(process.execPath, [MAIN, "survey", many], { stdio: ["ignore", "pipe", "pipe"] });
  const said: string[] = [];
  child.stderr.on("data", (part: Buffer) => said.push(String(part)));
  // The first line comes before any file is opened, so the interrupt falls into the work.
  child.stdout.once("data", (part: Buffer) => {
    expect(String(part)).toContain("4,000 files under");
    child.kill("SIGINT");
  });
  const status = await new Promise((resolve) => child.once("exit", resolve));
  expect(status).toBe(130);
  expect(said.join("")).toContain("interrupted");
});

test("the README's example prints what it says it prints", () => {
  const readme = readFileSync(new URL("../README.md", import.meta.url), "utf8");
  const [, line, output] = /```\n\$ rainreckon ([^\n]+)\n([\s\S]*?)```/.exec(readme) ?? [];
  expect(cli(line!.split(" ")).stdout).toBe(output);
});
