import { expect, test } from "vitest";
import { escapeText, html } from "./html.ts";

// The five characters and their references: HTML Living Standard, named and numeric references.
test("what has a meaning in markup becomes a reference", () => {
  expect(escapeText(`<img src=x onerror="alert('1')">&`)).toBe(
    "&lt;img src=x onerror=&quot;alert(&#39;1&#39;)&quot;&gt;&amp;",
  );
  expect(html`<td title="${'"><svg onload=x'}">${"</script>"}</td>`.text).toBe(
    '<td title="&quot;&gt;&lt;svg onload=x">&lt;/script&gt;</td>',
  );
});

test("markup made here passes as it is, lists are joined, and nothing is printed for what is absent", () => {
  expect(html`<p>${html`<b>${"a<b"}</b>`}${["x", undefined, false, 3]}</p>`.text).toBe(
    "<p><b>a&lt;b</b>x3</p>",
  );
});

// Unicode Technical Report 36: characters that turn the reading direction disguise names.
test.each([
  ["right-to-left override", "\u202e"],
  ["isolate", "\u2067"],
  ["null", "\u0000"],
  ["escape", "\u001b"],
  ["half of a pair", "\ud83d"],
])("%s is shown as a replacement character", (_, character) => {
  expect(escapeText(`a${character}b`)).toBe("a\ufffdb");
});

test("letters of every script and whole pairs stay", () => {
  expect(escapeText("Ærø Überlauf 雨量計 مقياس 🌧\n\t")).toBe("Ærø Überlauf 雨量計 مقياس 🌧\n\t");
});

test("a number that is not finite is a mistake of the caller, never printed", () => {
  expect(() => html`${Number.NaN}`).toThrow(RangeError);
});
