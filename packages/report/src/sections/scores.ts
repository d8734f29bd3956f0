import type { ReportInput, ReportScore } from "../input.ts";
import { missing } from "../text/figures.ts";
import { html, type Markup } from "../text/html.ts";
import { counted, countText } from "../text/numbers.ts";
import { intervalWords, missingIntervalWords, scoreSubject, scoreWords } from "../text/score-words.ts";

/** Scores in plain words, each with its number, count and intervals, before and after adjustment. */
export function scoreSection(input: ReportInput): Markup {
  const { pairs, radar, crossValidated } = input.scores;
  if (radar.length === 0) return html``;
  if ([...radar, ...crossValidated].every(({ score }) => score.n === 0)) {
    return html`<section id="scores" aria-labelledby="scores-heading"><h2 id="scores-heading">How well radar and gauges agree</h2><p>There is no pair of gauge and radar to score.</p></section>`;
  }
  const after = crossValidated.length > 0;
  return html`<section id="scores" aria-labelledby="scores-heading"><h2 id="scores-heading">How well radar and gauges agree</h2><p class="lead">${pairs.charAt(0).toUpperCase()}${pairs.slice(1)}. Ratios are radar/gauge.${
    after && " After adjustment each gauge is held against a value that it had no part in."
  }</p><div class="scroll" role="region" tabindex="0" aria-label="Scores"><table class="scores"><caption>Scores, with the range in which they would lie in a like sample</caption><thead><tr><th scope="col">In words</th><th scope="col">Radar</th>${
    after && html`<th scope="col">Adjusted, cross-validated</th>`
  }<th scope="col" class="number">Pairs</th></tr></thead><tbody>${radar.map((entry) => {
    const same = crossValidated.find(
      (other) => other.score.name === entry.score.name && other.thresholdMm === entry.thresholdMm,
    );
    return row(entry, after, same);
  })}</tbody></table></div>${missingIntervalWords(
    [...radar, ...crossValidated].map(({ score }) => score),
  ).map((line) => html`<p class="small">${line}</p>`)}</section>`;
}

function row(entry: ReportScore, after: boolean, same: ReportScore | undefined): Markup {
  const { score } = entry;
  const sentence = Number.isFinite(score.value) ? scoreWords(entry).sentence : scoreSubject(entry);
  return html`<tr><th scope="row" title="${score.definition}">${sentence}</th>${figureCell(entry)}${
    after && (same ? figureCell(same) : html`<td>${missing("not worked out after adjustment")}</td>`)
  }<td class="number">${countText(score.n)}${
    score.dropped > 0 && html`<span class="sub">${counted(score.dropped, "pair")} dropped</span>`
  }</td></tr>`;
}

function figureCell(entry: ReportScore): Markup {
  const { score } = entry;
  if (!Number.isFinite(score.value)) {
    const reason = score.reason ?? "it is not defined for these pairs";
    return html`<td>${missing(reason)}<span class="sub">${reason}</span></td>`;
  }
  const words = scoreWords(entry);
  return html`<td><b>${words.figure}</b>${intervalWords(score, words.bound).map(
    (line) => html`<span class="sub">${line}</span>`,
  )}</td>`;
}
