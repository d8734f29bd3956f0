import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { displayText } from "./display-text.ts";

describe("text from files, made harmless", () => {
  test.each([
    // value                          shown                 why
    ["\u001b[31mred\u001b[0m", "[31mred[0m", "the escape character goes, so that no terminal obeys"],
    ["a\u0007b\u009bc", "abc", "bell and C1 control sequence introducer"],
    ["gpj.\u202egauge", "gpj.gauge", "right-to-left override (Unicode TR 36)"],
    ["two\r\nlines\tand a tab", "two lines and a tab", "line ends and tabs become a blank"],
    ["Zürich 東京 العربية", "Zürich 東京 العربية", "letters of any script stay"],
    ["half \ud83d pair", "half  pair", "a lone surrogate goes"],
    ["🌧 rain", "🌧 rain", "a pair stays"],
    [12.5, "12.5", "numbers are shown"],
  ])("%j is shown as %j: %s", (value, shown, _why) => {
    expect(displayText(value)).toBe(shown);
  });

  test("long text is cut by characters and says so", () => {
    expect(displayText("🌧".repeat(300), 4)).toBe("🌧🌧🌧…");
    expect(displayText("abcd", 4)).toBe("abcd");
  });

  test("nothing shown holds a control character, whatever came in", () => {
    fc.assert(
      fc.property(fc.string({ unit: "binary", maxLength: 300 }), (text) => {
        const shown = displayText(text, 50);
        expect(/\p{Cc}|\p{Cs}|[\u202a-\u202e\u2066-\u2069]/u.test(shown)).toBe(false);
        expect(Array.from(shown).length).toBeLessThanOrEqual(50);
      }),
    );
  });
});
