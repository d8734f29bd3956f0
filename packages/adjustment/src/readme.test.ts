import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import * as adjustment from "./index.ts";

test("the example in the README runs and gives what it says", () => {
  const readme = readFileSync(new URL("../README.md", import.meta.url), "utf8");
  const example = /```ts\n([\s\S]*?)```/.exec(readme)?.[1] ?? "";
  let checked = 0;
  const body = example
    .replace(/import (\{[^}]*\}) from "@rainreckon\/adjustment";/, "const $1 = adjustment;")
    .replace(/^(\S.*); \/\/ ("[^"]*").*$/gm, (_, expression, said) => {
      checked++;
      return `expect(${expression}).toBe(${said});`;
    });
  new Function("adjustment", "expect", body)(adjustment, expect);
  expect(checked).toBe(3);
});
