import { expect, test } from "vitest";
import { relationWasNotChosen } from "./cautions.ts";

test.each([
  ["as the plan was written", "relation: marshall-1955-200/1.6 # default: it was not chosen by anyone", true],
  ["no relation at all", "use: true", true],
  ["looked at and kept: the remark is gone", "relation: marshall-1955-200/1.6", false],
  [
    "another one, the old remark still behind it",
    "relation: fulton-1998-300/1.4 # default: not chosen",
    false,
  ],
  ["a radar that is not used", "use: false", false],
])("%s", (_what, line, expected) => {
  expect(relationWasNotChosen(`radars:\n  - id: one\n    ${line}\n`)).toBe(expected);
});
