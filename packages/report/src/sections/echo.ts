import type { ReportInput } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { countText, mmText } from "../text/numbers.ts";

/** Signed decibels to a tenth, with a true minus. */
function dbText(db: number): string {
  const text = Math.abs(db).toFixed(1);
  if (Number(text) === 0) return "0.0";
  return `${db > 0 ? "+" : "\u2212"}${text}`;
}

/** What screening took away, what corrections added, and what was learned of each radar. Empty where nothing was done. */
export function echoSection({ echo }: ReportInput): Markup {
  if (echo === undefined) return html``;
  const { screens, corrections, profile, radars } = echo;
  return html`<section id="echo" aria-labelledby="echo-heading"><h2 id="echo-heading">From echo to rain</h2><p class="lead">Echo that is not rain was taken out gate by gate; the rest was corrected for what hid or changed it on its way. What a screen took is no part of the total.</p><h3>Screened</h3><div class="scroll" role="region" tabindex="0" aria-label="Screens and their toll"><table><caption>Depth that screened echo would have made; each gate counts under the first screen that took it</caption><thead><tr><th scope="col">Screen</th><th scope="col" class="number">Gates</th><th scope="col" class="number">Mean over the place, mm</th><th scope="col" class="number">Worst cell, mm</th></tr></thead><tbody>${screens.map(
    ({ name, gates, districtMm, worstCellMm }) =>
      html`<tr><th scope="row">${name}</th><td class="number">${countText(gates)}</td><td class="number">${mmText(districtMm)}</td><td class="number">${mmText(worstCellMm)}</td></tr>`,
  )}</tbody></table></div><h3>Corrected</h3><div class="scroll" role="region" tabindex="0" aria-label="Corrections and their effect"><table><caption>Decibels added to the echo that made the rain</caption><thead><tr><th scope="col">Correction</th><th scope="col" class="number">Mean over the place, dB</th><th scope="col" class="number">Largest in a cell, dB</th></tr></thead><tbody>${corrections.map(
    ({ name, meanDb, largestDb }) =>
      html`<tr><th scope="row">${name}</th><td class="number">${dbText(meanDb)}</td><td class="number">${dbText(largestDb)}</td></tr>`,
  )}</tbody></table></div>${profileTable(profile)}${radars.map(
    ({ id, statements }) =>
      html`<h3>Radar ${id}</h3><ul>${statements.map((statement) => html`<li>${statement}</li>`)}</ul>`,
  )}</section>`;
}

function profileTable(profile: NonNullable<ReportInput["echo"]>["profile"]): Markup {
  if (profile.length === 0) return html``;
  return html`<h3>Vertical profile</h3><div class="scroll" role="region" tabindex="0" aria-label="Vertical profile by range"><table><caption>What the vertical profile added, by range from the radar; what lies too high for it is not observed</caption><thead><tr><th scope="col">Range, km</th><th scope="col" class="number">Gates with echo</th><th scope="col" class="number">Mean, dB</th><th scope="col" class="number">Gates not observed</th></tr></thead><tbody>${profile.map(
    ({ fromKm, toKm, wetGates, meanDb, lostGates }) =>
      html`<tr><th scope="row">${fromKm} to ${toKm}</th><td class="number">${countText(wetGates)}</td><td class="number">${dbText(meanDb)}</td><td class="number">${countText(lostGates)}</td></tr>`,
  )}</tbody></table></div>`;
}
