/**
 * Slow signals of a rehearsal with their exact derivatives: what the swimmer's frequency, amplitude and attitude are
 * made of. A signal is twice continuously differentiable, so angular rates and accelerations have no jumps.
 */

/** A signal's value, first and second derivative by time. Rewritten in place. */
export interface Jet {
  value: number;
  rate: number;
  acceleration: number;
}

export const newJet = (): Jet => ({ value: 0, rate: 0, acceleration: 0 });

/** A change that ends `overS` after `atS` at the value `to`. */
export interface Step {
  readonly atS: number;
  readonly overS: number;
  readonly to: number;
}

/** Constant but for smooth steps from value to value (the quintic of Perlin, ACM Trans. Graph. 21 (2002) 681). */
export class SteppedSignal {
  readonly #initial: number;
  readonly #steps: readonly (Step & { readonly by: number })[];

  /** @param steps in order of time */
  constructor(initial: number, steps: readonly Step[] = []) {
    this.#initial = initial;
    this.#steps = steps.map((step, i) => ({ ...step, by: step.to - (i === 0 ? initial : steps[i - 1].to) }));
  }

  /** Adds this signal at `timeS` to `out`. */
  addTo(out: Jet, timeS: number): void {
    out.value += this.#initial;
    for (const { atS, overS, by } of this.#steps) {
      const u = Math.min(1, Math.max(0, (timeS - atS) / overS));
      out.value += by * u ** 3 * (10 - 15 * u + 6 * u * u);
      out.rate += (by * 30 * (u * (1 - u)) ** 2) / overS;
      out.acceleration += (by * 60 * u * (1 - u) * (1 - 2 * u)) / overS ** 2;
    }
  }

  /** Integral from 0 to `timeS`. */
  integral(timeS: number): number {
    let sum = this.#initial * timeS;
    for (const { atS, overS, by } of this.#steps) {
      const u = Math.min(1, Math.max(0, (timeS - atS) / overS));
      const after = Math.max(0, timeS - atS - overS);
      sum += by * (overS * u ** 4 * (2.5 - 3 * u + u * u) + after);
    }
    return sum;
  }
}

/** A slow sinusoid. */
export interface Wander {
  readonly amplitude: number;
  readonly periodS: number;
}

/** Adds a sinusoid that sets in smoothly with `gate` (0 before, 1 after) to `out`. */
export function addWander(out: Jet, { amplitude, periodS }: Wander, gate: Jet, timeS: number): void {
  const omega = (2 * Math.PI) / periodS;
  const sine = amplitude * Math.sin(omega * timeS);
  const cosine = amplitude * Math.cos(omega * timeS);
  out.value += gate.value * sine;
  out.rate += gate.rate * sine + gate.value * omega * cosine;
  out.acceleration +=
    gate.acceleration * sine + 2 * gate.rate * omega * cosine - gate.value * omega * omega * sine;
}

/** Sets a jet to zero, ready to be added to. */
export function clear(jet: Jet): void {
  jet.value = 0;
  jet.rate = 0;
  jet.acceleration = 0;
}
