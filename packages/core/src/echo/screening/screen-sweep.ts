import { type MeasuredEcho, type PolarEcho, SCREENS, type Screen, screenBit } from "../polar-echo.ts";
import { type Evidence, weighEvidence } from "./evidence.ts";
import { fillFromNeighbours } from "./fill.ts";
import { screenFilteredPower } from "./filtered-power.ts";
import { screenClearAir, screenLowCorrelation, screenNoisyPhase } from "./polarimetric.ts";
import type { ScreeningReport, ScreeningSettings } from "./settings.ts";
import { markSideLobes } from "./side-lobe.ts";
import { screenSpeckle } from "./speckle.ts";
import { screenSpikes } from "./spike.ts";
import { type LearnedStaticEcho, learnedFor, screenLearned } from "./static-echo.ts";
import { type SweepView, viewSweep } from "./sweep-view.ts";
import { screenRoughness } from "./texture.ts";
import { screenVerticalGradient } from "./vertical-gradient.ts";

/**
 * Screens one sweep: writes into `echo.screenedBy` what each gate is screened by, makes those gates NaN in
 * `echo.dbz`, fills them where the settings say so, and marks what was filled and what side lobes may have made.
 *
 * Gates that are dry or not observed are never screened. A gate is screened by one piece of strong evidence or by
 * two independent pieces of weak evidence; each screen says which is which.
 *
 * @param above - the raw sweep above, of any geometry
 * @param learned - of the same radar, from `StaticEchoLearner`
 * @returns counts, and which screens had nothing to judge by
 */
export function screenSweep(
  echo: PolarEcho,
  above: MeasuredEcho | undefined,
  learned: LearnedStaticEcho | undefined,
  settings: ScreeningSettings,
): ScreeningReport {
  const view = viewSweep(echo);
  const gates = echo.measuredDbz.length;
  const evidence: Evidence = { strong: new Uint16Array(gates), weak: new Uint16Array(gates) };
  const couldNotRun: { screen: Screen; lacking: string }[] = [];
  const isOn = (screen: Screen): boolean => !settings.off.includes(screen);
  /** Runs a screen if it is asked for and there is what it needs. */
  const ask = (screen: Screen, lacking: string | undefined, run: () => unknown): void => {
    if (!isOn(screen)) return;
    if (lacking === undefined) run();
    else couldNotRun.push({ screen, lacking });
  };
  const lacks = (values: Float32Array | undefined, name: string) => (values === undefined ? name : undefined);

  const known = learnedFor(echo, learned);
  const unlearned = known === undefined ? "rounds to learn from" : undefined;
  ask("static-echo", unlearned, () => {
    if (known !== undefined) screenLearned(view, known, known.static, "static-echo", evidence);
  });
  ask("filtered-power", lacks(echo.unfilteredDbz, "TH"), () => screenFilteredPower(view, evidence));
  ask("low-correlation", lacks(echo.rhohv, "RHOHV"), () => screenLowCorrelation(view, evidence));
  ask("noisy-phase", lacks(echo.phidpDeg, "PHIDP"), () => screenNoisyPhase(view, evidence));
  ask("vertical-gradient", above === undefined ? "a sweep above" : undefined, () => {
    if (above !== undefined && !screenVerticalGradient(view, above, evidence)) {
      couldNotRun.push({ screen: "vertical-gradient", lacking: "a sweep close above" });
    }
  });
  ask("spike", undefined, () => screenSpikes(view, evidence));
  ask("fixed-point", unlearned, () => {
    if (known !== undefined) screenLearned(view, known, known.points, "fixed-point", evidence);
  });
  ask("clear-air", lacks(echo.zdrDb, "ZDR") ?? lacks(echo.rhohv, "RHOHV"), () =>
    screenClearAir(view, evidence),
  );
  // Last, since they only support what others found.
  let supporting = 0;
  ask("still-echo", lacks(echo.velocityMPerS, "VRADH"), () => {
    supporting |= screenBit("still-echo");
  });
  ask("texture", undefined, () => {
    supporting |= screenBit("texture");
  });
  if (supporting !== 0) screenRoughness(view, supporting, evidence);
  weighEvidence(view, evidence);
  ask("speckle", undefined, () => screenSpeckle(view));

  couldNotRun.sort((a, b) => screenBit(a.screen) - screenBit(b.screen));
  const counts = takeScreened(view);
  const filledGates = settings.fill === "neighbours" ? fillFromNeighbours(view) : 0;
  return { ...counts, filledGates, sideLobeGates: markSideLobes(view), couldNotRun };
}

/** Makes screened gates not observed, and counts them. */
function takeScreened({ echo: { dbz, screenedBy }, echoAt }: SweepView) {
  const gatesByScreen = new Uint32Array(SCREENS.length);
  const gatesByFirstScreen = new Uint32Array(SCREENS.length);
  const bits = SCREENS.map(screenBit);
  let screenedGates = 0;
  for (let k = 0; k < echoAt.length; k++) {
    const at = echoAt[k] as number;
    const by = screenedBy[at] as number;
    if (by === 0) continue;
    dbz[at] = Number.NaN;
    screenedGates++;
    let first = true;
    for (let screen = 0; screen < bits.length; screen++) {
      if ((by & (bits[screen] as number)) === 0) continue;
      gatesByScreen[screen] = (gatesByScreen[screen] as number) + 1;
      if (first) gatesByFirstScreen[screen] = (gatesByFirstScreen[screen] as number) + 1;
      first = false;
    }
  }
  return { echoGates: echoAt.length, screenedGates, gatesByScreen, gatesByFirstScreen };
}
