/**
 * The travelling wave of a swimming body and its exact kinematics in the plane of bending.
 *
 * With s the arc length from the nose, the lateral position of every point is
 *
 *     y(s, t) = A(t) a(s) sin(phi(t) - k s)
 *
 * exactly, nose included, and the body does not stretch: its tangent makes the angle theta = -asin(dy/ds) with the travel
 * axis, so the distance behind the nose is X(s, t) = integral of cos theta. All time derivatives are analytic; X is
 * integrated along the body by Gauss-Legendre quadrature (four nodes a panel, Abramowitz & Stegun 25.4.30).
 *
 * A body may be bent steadily besides: its tangent is then turned by bend (1/2 - s/L), a circular arc under the wave, and
 * y is integrated along the body like X.
 */
import { BendwatchError } from "../errors.ts";
import { GAITS, type Gait, type GaitName } from "../numeric/gaits.ts";
import { clear, type Jet } from "./signal.ts";

/** Largest slope dy/ds a body may have: beyond it the tangent nears a right angle to the travel axis and the bend sharpens without bound. */
const MAX_SLOPE = 0.95;
/** Panels of the quadrature over a whole body: its error is then below 1e-11 of the length. */
const PANELS_PER_LENGTH = 16;
const NODES = [0.339981043584856, 0.861136311594053];
const WEIGHTS = [0.652145154862546, 0.347854845137454];

/** The wave's drive at one moment: amplitude factor and phase with their derivatives, as factors of the two quadratures. */
export class WaveDrive {
  sine = 0;
  cosine = 1;
  /** f = value u; df/dt = rateU u + rateV v; d2f/dt2 = accelerationU u + accelerationV v, with v = du/dphi. */
  value = 0;
  rateU = 0;
  rateV = 0;
  accelerationU = 0;
  accelerationV = 0;

  set(amplitude: Jet, phase: Jet): void {
    this.sine = Math.sin(phase.value);
    this.cosine = Math.cos(phase.value);
    this.value = amplitude.value;
    this.rateU = amplitude.rate;
    this.rateV = amplitude.value * phase.rate;
    this.accelerationU = amplitude.acceleration - amplitude.value * phase.rate ** 2;
    this.accelerationV = 2 * amplitude.rate * phase.rate + amplitude.value * phase.acceleration;
  }
}

/** Where a place on the body is in the plane of bending, and how it moves. */
export interface PlaneMotion {
  /** Distance behind the nose along the travel axis, m. */
  readonly behind: Jet;
  /** Distance left of the travel axis, m. */
  readonly lateral: Jet;
  /** Tangent towards the nose, rad from the travel axis, positive left; `acceleration` is not computed. */
  readonly angle: Jet;
}

/** One place on a waving body. */
export class WavePlace {
  /**
   * Quadrature nodes from the nose to here: the slope's factors of sine and minus cosine of phi, then the weight in m times
   * cosine and sine of the steady bend there.
   */
  readonly #nodes: Float64Array;
  /** The steady bend's share of the tangent's angle here, rad. */
  readonly #turned: number;
  readonly #bent: boolean;
  readonly #lateral: readonly [number, number];
  readonly #slope: readonly [number, number];
  readonly #m: Jet = { value: 0, rate: 0, acceleration: 0 };

  /**
   * @param station 0 nose to 1 tail tip
   * @param bend steady bend from tail tip to nose, rad, positive with the nose turned left
   */
  constructor(gaitName: GaitName, lengthM: number, station: number, bend = 0) {
    const gait = GAITS[gaitName];
    const k = (2 * Math.PI) / gait.wavelength; // per body length
    const wavingTo = bend === 0 ? station : 0;
    this.#lateral = quadratures(lengthM * gait.amplitude(wavingTo), 0, k * wavingTo);
    this.#turned = bend * (0.5 - station);
    this.#bent = bend !== 0;
    this.#slope = slopeAt(gait, k, station);
    const panels = Math.ceil(station * PANELS_PER_LENGTH);
    const half = station / panels / 2;
    const nodes: number[] = [];
    for (let panel = 0; panel < panels; panel++) {
      for (const side of [-1, 1]) {
        NODES.forEach((node, i) => {
          const x = half * (2 * panel + 1 + side * node);
          const weight = WEIGHTS[i] * half * lengthM;
          const turned = bend * (0.5 - x);
          nodes.push(...slopeAt(gait, k, x), weight * Math.cos(turned), weight * Math.sin(turned));
        });
      }
    }
    this.#nodes = Float64Array.from(nodes);
  }

  /** Writes this place's motion under `drive` to `out`. */
  motion(drive: WaveDrive, out: PlaneMotion): void {
    evaluate(drive, this.#lateral[0], this.#lateral[1], out.lateral);
    this.#integrate(drive, out.behind, out.lateral);
    const m = this.#m;
    evaluate(drive, this.#slope[0], this.#slope[1], m);
    out.angle.value = this.#turned - Math.asin(m.value);
    out.angle.rate = -m.rate / Math.sqrt(1 - m.value ** 2);
  }

  /** Sums up `behind`; of a bent body, adds to `lateral` (the nose's) what lies between. */
  #integrate(drive: WaveDrive, behind: Jet, lateral: Jet): void {
    const nodes = this.#nodes;
    const m = this.#m;
    clear(behind);
    for (let i = 0; i < nodes.length; i += 4) {
      evaluate(drive, nodes[i], nodes[i + 1], m);
      const cosine = Math.sqrt(1 - m.value * m.value);
      const product = m.value * m.rate;
      const rate = -product / cosine;
      const acceleration = -(
        (m.rate * m.rate + m.value * m.acceleration) / cosine +
        product ** 2 / cosine ** 3
      );
      const along = nodes[i + 2];
      const across = nodes[i + 3];
      behind.value += along * cosine + across * m.value;
      behind.rate += along * rate + across * m.rate;
      behind.acceleration += along * acceleration + across * m.acceleration;
      if (!this.#bent) continue;
      lateral.value += along * m.value - across * cosine;
      lateral.rate += along * m.rate - across * rate;
      lateral.acceleration += along * m.acceleration - across * acceleration;
    }
  }
}

/** Refuses an amplitude factor under which the body would fold over. @throws BendwatchError COMMAND_INVALID */
export function checkAmplitude(gaitName: GaitName, factor: number): void {
  const gait = GAITS[gaitName];
  const k = (2 * Math.PI) / gait.wavelength;
  let steepest = 0;
  for (let x = 0; x <= 1; x += 1 / 64) steepest = Math.max(steepest, Math.hypot(...slopeAt(gait, k, x)));
  if (factor >= 0 && factor * steepest <= MAX_SLOPE) return;
  throw new BendwatchError("COMMAND_INVALID", {
    where: `amplitude of a ${gaitName} rehearsal`,
    found: `${factor} times the published one`,
    expected: `0 to ${(Math.floor((100 * MAX_SLOPE) / steepest) / 100).toFixed(2)}`,
  });
}

/** Slope of the lateral position along the body, as factors of sine and minus cosine of the phase. */
function slopeAt(gait: Gait, k: number, x: number): [number, number] {
  return quadratures(gait.slope(x), -k * gait.amplitude(x), k * x);
}

/** p sin(phi - d) + q cos(phi - d) = u sin phi - v cos phi. */
function quadratures(p: number, q: number, d: number): [number, number] {
  return [p * Math.cos(d) + q * Math.sin(d), p * Math.sin(d) - q * Math.cos(d)];
}

function evaluate(drive: WaveDrive, ofSine: number, ofMinusCosine: number, out: Jet): void {
  const u = drive.sine * ofSine - drive.cosine * ofMinusCosine;
  const v = drive.cosine * ofSine + drive.sine * ofMinusCosine;
  out.value = drive.value * u;
  out.rate = drive.rateU * u + drive.rateV * v;
  out.acceleration = drive.accelerationU * u + drive.accelerationV * v;
}
