/**
 * How bodies swim: the amplitude of the lateral wave along the body, and its wavelength. Lengths as shares of body
 * length, places 0 nose to 1 tail tip.
 */

export interface Gait {
  /** Amplitude of the wave at a place, and its derivative along the body. */
  amplitude(x: number): number;
  slope(x: number): number;
  readonly wavelength: number;
}

/** Published envelopes, figures from memory. */
export const GAITS = {
  /** Borazjani & Sotiropoulos, J. Exp. Biol. 211 (2008) 1541: a mackerel's. */
  carangiform: {
    amplitude: (x: number) => 0.02 - 0.08 * x + 0.16 * x * x,
    slope: (x: number) => -0.08 + 0.32 * x,
    wavelength: 0.95,
  },
  /** Borazjani & Sotiropoulos, J. Exp. Biol. 212 (2009) 576: a lamprey's. */
  anguilliform: {
    amplitude: (x: number) => 0.089 * Math.exp(x - 1),
    slope: (x: number) => 0.089 * Math.exp(x - 1),
    wavelength: 0.642,
  },
} as const satisfies Record<string, Gait>;

export type GaitName = keyof typeof GAITS;

/** An envelope by its polynomial: coefficients of 1, x, x², ... */
export function polynomialGait(coefficients: readonly number[], wavelength: number): Gait {
  return {
    amplitude: (x) => coefficients.reduceRight((sum, c) => sum * x + c, 0),
    slope: (x) => coefficients.reduceRight((sum, c, power) => (power > 0 ? sum * x + power * c : sum), 0),
    wavelength,
  };
}
