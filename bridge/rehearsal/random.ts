/**
 * Seeded random numbers: xoshiro128** (Blackman & Vigna, ACM Trans. Math. Softw. 47 (2021) 36), its state filled by a
 * 32-bit splitmix (after Steele, Lea & Flood, OOPSLA 2014). One generator a purpose, so that what one draws never
 * shifts what another gives.
 */

export class Random {
  readonly #state: Uint32Array;
  #spare = Number.NaN;

  /** @param state four 32-bit words, not all zero */
  constructor(state: readonly [number, number, number, number]) {
    this.#state = Uint32Array.from(state);
  }

  /** Generator number `stream` of a run: the same numbers for the same pair, unrelated ones for any other. */
  static forStream(seed: number, stream: number): Random {
    const splitmix = new Splitmix(new Splitmix(seed).next() ^ Math.imul(stream + 1, 0x9e3779b9));
    return new Random([splitmix.next(), splitmix.next(), splitmix.next(), splitmix.next() | 1]);
  }

  /** Uniform over all 32-bit words. */
  word(): number {
    const s = this.#state;
    const result = Math.imul(rotateLeft(Math.imul(s[1], 5), 7), 9) >>> 0;
    const shifted = s[1] << 9;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= shifted;
    s[3] = rotateLeft(s[3], 11);
    return result;
  }

  /** Uniform in [0, 1). */
  uniform(): number {
    return this.word() / 2 ** 32;
  }

  /** Uniform between two bounds. */
  between(low: number, high: number): number {
    return low + (high - low) * this.uniform();
  }

  /** Normal with mean 0 and variance 1: polar method (Marsaglia & Bray, SIAM Rev. 6 (1964) 260). */
  normal(): number {
    if (!Number.isNaN(this.#spare)) {
      const spare = this.#spare;
      this.#spare = Number.NaN;
      return spare;
    }
    let u: number;
    let v: number;
    let square: number;
    do {
      u = this.between(-1, 1);
      v = this.between(-1, 1);
      square = u * u + v * v;
    } while (square >= 1 || square === 0);
    const factor = Math.sqrt((-2 * Math.log(square)) / square);
    this.#spare = v * factor;
    return u * factor;
  }
}

class Splitmix {
  #counter: number;

  constructor(seed: number) {
    this.#counter = seed;
  }

  next(): number {
    this.#counter = (this.#counter + 0x9e3779b9) | 0;
    let word = this.#counter ^ (this.#counter >>> 16);
    word = Math.imul(word, 0x21f0aaad);
    word ^= word >>> 15;
    word = Math.imul(word, 0x735a2d97);
    return (word ^ (word >>> 15)) >>> 0;
  }
}

function rotateLeft(word: number, bits: number): number {
  return (word << bits) | (word >>> (32 - bits));
}
