/**
 * Magnetic reference: norm and dip of the field that is taken for the Earth's. A field that differs is disturbed; a
 * steady other field, met for long enough in motion, becomes the new reference. What the health stage has flagged is
 * disturbed in any case and becomes no reference.
 */
import type { StepGains } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import type { SensorState } from "./sensor-state.ts";

/** Judges the newest field (in the level frame, not zero) against the reference, and lets the reference follow. */
export function watchField(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const { levelMag, normAndDip, currentField } = state;
  const norm = Math.sqrt(levelMag[0]! ** 2 + levelMag[1]! ** 2 + levelMag[2]! ** 2);
  normAndDip[0] = norm;
  normAndDip[1] = -Math.asin(levelMag[2]! / norm);
  currentField.step(gains.magCurrent, normAndDip);
  compareWithReference(state, gains, parameters);
  considerNewReference(state, gains, parameters);
}

function compareWithReference(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  if (state.fieldFlagged || !isNear(state, state.referenceNorm, state.referenceDip, parameters)) {
    state.undisturbedS = 0;
    state.disturbed = true;
    return;
  }
  state.undisturbedS += state.magStepS;
  if (state.undisturbedS < parameters.magMinUndisturbedS) return;
  const field = state.currentField.value;
  state.disturbed = false;
  state.referenceNorm += gains.magReference * (field[0]! - state.referenceNorm);
  state.referenceDip += gains.magReference * (field[1]! - state.referenceDip);
}

function considerNewReference(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const field = state.currentField.value;
  if (state.fieldFlagged || !isNear(state, state.candidateNorm, state.candidateDip, parameters)) {
    state.candidateS = 0;
    state.candidateNorm = field[0]!;
    state.candidateDip = field[1]!;
    return;
  }
  if (isMoving(state, parameters)) state.candidateS += state.magStepS;
  state.candidateNorm += gains.magReference * (field[0]! - state.candidateNorm);
  state.candidateDip += gains.magReference * (field[1]! - state.candidateDip);
  const needed = state.referenceKnown ? parameters.magNewS : parameters.magFirstS;
  if (!state.disturbed || state.candidateS < needed) return;
  state.referenceKnown = true;
  state.referenceNorm = state.candidateNorm;
  state.referenceDip = state.candidateDip;
  state.disturbed = false;
  state.undisturbedS = parameters.magMinUndisturbedS;
}

/** Is the current field within the limits of this one? Never of a norm of zero, which stands for none yet. */
function isNear(state: SensorState, norm: number, dip: number, parameters: FusionParameters): boolean {
  const field = state.currentField.value;
  return (
    Math.abs(field[0]! - norm) < parameters.magNormShare * norm &&
    Math.abs(field[1]! - dip) < parameters.magDipLimit
  );
}

function isMoving(state: SensorState, parameters: FusionParameters): boolean {
  const rate = state.restRate.value;
  return rate[0]! ** 2 + rate[1]! ** 2 + rate[2]! ** 2 >= parameters.magNewMinRate ** 2;
}
