import { expectExampleToHold } from "@rainreckon/test-data/readme";
import { test } from "vitest";
import * as adjustment from "./index.ts";

test("the README's example prints what it says it prints", async () => {
  await expectExampleToHold(new URL("../README.md", import.meta.url), {
    "@rainreckon/adjustment": adjustment,
  });
});
