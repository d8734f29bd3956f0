import { counted } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { Comparison } from "./compare-runs.ts";
import { figureWords } from "./figure-words.ts";

type Figure = Comparison["figures"][number];

const MAX_ROWS = 12;
const SECTIONS: readonly (readonly [Figure["table"], string])[] = [
  ["headline", "Headline"],
  ["catchments", "Catchments, whole window"],
  ["gauges", "Gauges"],
  ["scores", "Scores of all pairs"],
];

/** A comparison for people: figures first, then what stands behind them. */
export function compareText(comparison: Comparison): string {
  const { a, b, plan, inputs } = comparison;
  const parts = [
    textTable(
      [
        { head: "" },
        { head: "folder" },
        { head: "title" },
        { head: "status" },
        { head: "version" },
        { head: "run" },
      ],
      [
        ["a", a.folder, a.title, a.status, a.version, a.runDigest.slice(0, 12)],
        ["b", b.folder, b.title, b.status, b.version, b.runDigest.slice(0, 12)],
      ],
    ),
    ...SECTIONS.map(([table, title]) =>
      figureSection(
        title,
        comparison.figures.filter((one) => one.table === table),
      ),
    ),
    section(
      "Plan values",
      plan.length,
      textTable(
        [{ head: "value" }, { head: "a" }, { head: "b" }],
        plan.slice(0, MAX_ROWS).map((one) => [one.path, shown(one.a), shown(one.b)]),
      ),
    ),
    section(
      "Inputs",
      inputs.length,
      textTable(
        [{ head: "input" }, { head: "kind" }, { head: "change" }, { head: "detail" }],
        inputs.slice(0, MAX_ROWS).map((one) => [one.path, one.kind, one.change, one.detail]),
      ),
    ),
    verdict(comparison),
  ];
  return parts.join("\n\n");
}

function figureSection(title: string, figures: readonly Figure[]): string {
  const whole = figures.filter((one) => one.whole);
  // Words that explain a figure change with it; they are not news of their own.
  const news = whole.filter((one) => !isNegligible(one) && one.figure !== "evidence");
  const table = textTable(
    [
      { head: "of" },
      { head: "figure" },
      { head: "a", align: "right" },
      { head: "b", align: "right" },
      { head: "b - a", align: "right" },
    ],
    news
      .slice(0, MAX_ROWS)
      .map((one) => [one.of, figureWords(one.figure), shown(one.a), shown(one.b), signed(one.change)]),
  );
  const rest: [number, string][] = [
    [whole.filter(isNegligible).length, "by less than a millionth of itself"],
    [figures.length - whole.length, "of single steps or parts"],
  ];
  const lines = rest
    .filter(([count]) => count > 0)
    .map(([count, which]) => `\n  besides: ${counted(count, "value")} ${which}`);
  return section(title, news.length, table) + lines.join("");
}

/** So small a change comes of rounding, where something far upstream was scaled and scaled back. */
function isNegligible({ a, b, change }: Figure): boolean {
  if (typeof a !== "number" || typeof b !== "number" || change === null) return false;
  return Math.abs(change) <= 1e-6 * Math.max(Math.abs(a), Math.abs(b));
}

function section(title: string, count: number, table: string): string {
  if (count === 0) return `${title}: no difference`;
  const unsaid = count - MAX_ROWS;
  return `${title}: ${count} ${count === 1 ? "differs" : "differ"}\n${table}${unsaid > 0 ? `\nand ${unsaid} more (--json lists all)` : ""}`;
}

function verdict({ sameFigures, plan, inputs, a, b }: Comparison): string {
  const behind: string[] = [];
  if (plan.length > 0) behind.push(counted(plan.length, "plan value"));
  if (inputs.length > 0) behind.push(counted(inputs.length, "input"));
  if (a.version !== b.version) behind.push("the version of the program");
  const causes = behind.join(", ");
  if (sameFigures) {
    return causes === ""
      ? "Same figures, same plan, same inputs."
      : `Same figures, although these differ: ${causes}.`;
  }
  return causes === ""
    ? "The figures differ, and neither plan nor inputs say why."
    : `The figures differ, and so do: ${causes}.`;
}

function shown(value: string | number | boolean | null): string {
  if (value === null) return "–";
  return typeof value === "number" ? digits(value) : String(value);
}

function signed(change: number | null): string {
  if (change === null) return "–";
  return change > 0 ? `+${digits(change)}` : digits(change);
}

/** Three decimals, or what it takes to see two digits of a small number. */
function digits(value: number): string {
  const size = Math.abs(value);
  return size === 0 || size >= 0.01 ? String(Number(value.toFixed(3))) : String(Number(value.toPrecision(2)));
}
