/**
 * The simulated body: a travelling wave (body-wave.ts) on a body that slowly wanders in heading, pitch and roll, held in
 * the flow of a flume (its travel axis turns but does not move on). Gives, exactly and for any moment, what each place on
 * the body does and what an ideal sensor there would feel.
 */
import { multiply, rotate } from "../numeric/quaternion.ts";
import { STANDARD_GRAVITY } from "../numeric/units.ts";
import { AttitudeMotion, setTurn, turnAboutZ } from "./attitude.ts";
import { checkAmplitude, type PlaneMotion, WaveDrive, WavePlace } from "./body-wave.ts";
import { addWander, clear, newJet, type Step, SteppedSignal } from "./signal.ts";
import type { PaceChange, SwimmerOptions, Turn } from "./swimmer-options.ts";

/** What one place on the body does and what an ideal sensor there feels. Arrays are rewritten in place. */
export interface Kinematics {
  /** Body axes to earth, scalar first. */
  readonly orientation: Float64Array;
  /** m, earth axes, from the point of the travel axis abreast of the nose. */
  readonly position: Float64Array;
  /** rad/s, body axes. */
  readonly angularVelocity: Float64Array;
  /** m/s², body axes: acceleration minus gravity. */
  readonly specificForce: Float64Array;
}

export const newKinematics = (): Kinematics => ({
  orientation: new Float64Array(4),
  position: new Float64Array(3),
  angularVelocity: new Float64Array(3),
  specificForce: new Float64Array(3),
});

export class Swimmer {
  readonly #options: SwimmerOptions;
  readonly #lengthM: number;
  readonly #frequency: SteppedSignal;
  readonly #amplitude: SteppedSignal;
  readonly #course: SteppedSignal;
  readonly #pitch: SteppedSignal;
  readonly #roll: SteppedSignal;
  /** Sets the wandering in when the body begins to move. */
  readonly #gate: SteppedSignal;

  // The present moment, shared by all places.
  #timeS = Number.NaN;
  readonly #drive = new WaveDrive();
  readonly #attitude = new AttitudeMotion();
  readonly #phaseJet = newJet();
  readonly #amplitudeJet = newJet();
  readonly #gateJet = newJet();

  readonly #motion: PlaneMotion = { behind: newJet(), lateral: newJet(), angle: newJet() };
  readonly #vector = new Float64Array(3);
  readonly #bend = new Float64Array(4);

  /** @throws BendwatchError COMMAND_INVALID for an amplitude under which the body would fold over */
  constructor(lengthM: number, options: SwimmerOptions) {
    const { restS, startS, changes } = options;
    this.#options = options;
    this.#lengthM = lengthM;
    const start: Step = { atS: restS, overS: startS, to: options.amplitude };
    const amplitudes = [start, ...stepsOf(changes, (change) => change.amplitude)];
    for (const { to } of amplitudes) checkAmplitude(options.gait, to);
    this.#amplitude = new SteppedSignal(0, amplitudes);
    this.#frequency = new SteppedSignal(
      options.frequencyHz,
      stepsOf(changes, (change) => change.frequencyHz),
    );
    this.#course = turning(options.heading, options.turns);
    this.#pitch = turning(0, options.pitchTurns);
    this.#roll = turning(0, options.rollTurns);
    this.#gate = new SteppedSignal(0, [{ atS: restS, overS: startS, to: 1 }]);
  }

  /** A place on this body, made once and asked often. @param station 0 nose to 1 tail tip */
  place(station: number): WavePlace {
    return new WavePlace(this.#options.gait, this.#lengthM, station, this.#options.bend);
  }

  /** Writes what `place` does at `timeS` to `out`. */
  kinematics(timeS: number, place: WavePlace, out: Kinematics): void {
    this.#moveTo(timeS);
    const { behind, lateral, angle } = this.#motion;
    place.motion(this.#drive, this.#motion);
    const attitude = this.#attitude;
    const { orientation, position, angularVelocity, specificForce } = out;

    position[0] = -behind.value;
    position[1] = lateral.value;
    position[2] = 0;
    attitude.pointAcceleration(behind, lateral, specificForce);
    rotate(position, attitude.orientation, position);
    const up = this.#vector;
    attitude.up(up);
    for (let axis = 0; axis < 3; axis++) specificForce[axis] += STANDARD_GRAVITY * up[axis];

    turnAboutZ(specificForce, -angle.value, specificForce);
    turnAboutZ(attitude.angularVelocity, -angle.value, angularVelocity);
    angularVelocity[2] += angle.rate;
    setTurn(this.#bend, 3, angle.value);
    multiply(orientation, attitude.orientation, this.#bend);
  }

  /**
   * Writes the true midline to `out`: 3 per place, m, earth axes, relative to the first place.
   * @param places nose first, as `place` gave them
   */
  midline(timeS: number, places: readonly WavePlace[], out: Float64Array): void {
    this.#moveTo(timeS);
    const { behind, lateral } = this.#motion;
    const noseward = this.#vector;
    let noseLateral = 0;
    places.forEach((place, i) => {
      place.motion(this.#drive, this.#motion);
      if (i === 0) noseLateral = lateral.value;
      noseward[0] = -behind.value;
      noseward[1] = lateral.value - noseLateral;
      noseward[2] = 0;
      rotate(out, this.#attitude.orientation, noseward, 3 * i);
    });
  }

  /** Writes the plane motion of `place` at `timeS` (angle and sway against the travel axis) to `out`. */
  planeMotion(timeS: number, place: WavePlace, out: PlaneMotion): void {
    this.#moveTo(timeS);
    place.motion(this.#drive, out);
  }

  #moveTo(timeS: number): void {
    if (timeS === this.#timeS) return;
    this.#timeS = timeS;
    const { headingWander, pitchWander, rollWander } = this.#options;
    const phase = this.#phaseJet;
    clear(phase);
    this.#frequency.addTo(phase, timeS);
    phase.acceleration = 2 * Math.PI * phase.rate;
    phase.rate = 2 * Math.PI * phase.value;
    phase.value = 2 * Math.PI * this.#frequency.integral(timeS);
    clear(this.#amplitudeJet);
    this.#amplitude.addTo(this.#amplitudeJet, timeS);
    this.#drive.set(this.#amplitudeJet, phase);

    const gate = this.#gateJet;
    clear(gate);
    this.#gate.addTo(gate, timeS);
    const { heading, pitch, roll } = this.#attitude;
    clear(heading);
    clear(pitch);
    clear(roll);
    this.#course.addTo(heading, timeS);
    this.#pitch.addTo(pitch, timeS);
    this.#roll.addTo(roll, timeS);
    addWander(heading, headingWander, gate, timeS);
    addWander(pitch, pitchWander, gate, timeS);
    addWander(roll, rollWander, gate, timeS);
    this.#attitude.update();
  }
}

/** An angle that turns step by step. */
function turning(initial: number, turns: readonly Turn[]): SteppedSignal {
  let angle = initial;
  return new SteppedSignal(
    initial,
    turns.map(({ atS, overS, by }): Step => {
      angle += by;
      return { atS, overS, to: angle };
    }),
  );
}

function stepsOf(changes: readonly PaceChange[], pick: (change: PaceChange) => number | undefined): Step[] {
  return changes.flatMap((change) => {
    const to = pick(change);
    return to === undefined ? [] : [{ atS: change.atS, overS: change.overS, to }];
  });
}
