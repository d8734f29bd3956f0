import { readFileSync } from "node:fs";
import { expect } from "vitest";

/**
 * Runs the first `ts` example of a README and holds what it prints against what its comments promise:
 * each `console.log(…); // line` prints that line.
 *
 * The example is plain JavaScript but for its imports, which become the same names of the modules given.
 *
 * @param readme - the file; `modules` what its imports stand for, by name: {"@rainreckon/core": core}
 * @param after - a heading; the example is then the first one below it
 */
export async function expectExampleToHold(
  readme: URL,
  modules: Readonly<Record<string, object>>,
  after = "",
): Promise<void> {
  const text = readFileSync(readme, "utf8");
  const from = text.indexOf(after);
  expect(from, `heading ${after}`).toBeGreaterThanOrEqual(0);
  const example = /```ts\n(.*?)```/s.exec(text.slice(from))?.[1] ?? "";
  const promised = [...example.matchAll(/^\s*console\.log.*; \/\/ (.*)$/gm)].map(([, line]) => line);
  expect(promised.length, "lines that the example promises").toBeGreaterThan(0);
  const body = example.replace(
    /^import (\{[^}]*\}) from "([^"]+)";$/gm,
    (_, names, module) => `const ${names} = modules[${JSON.stringify(module)}];`,
  );
  const printed: string[] = [];
  const run = new Function("modules", "console", `return (async () => {${body}})();`);
  await run(modules, { log: (line: unknown) => printed.push(String(line)) });
  expect(printed).toEqual(promised);
}
