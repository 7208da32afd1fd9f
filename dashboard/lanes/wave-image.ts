/**
 * The body wave as an image: one column per place on the body, one row per sixtieth of a second of hub time, newest on
 * top. Values are kept beside the pixels, so that another scale or another light colours anew what is already there.
 */
import { mix, type Palette } from "../look/palette.ts";
import type { PastMidlines } from "../stream/past.ts";

export const WAVE_SPAN_S = 3;
export const WAVE_COLUMNS = 160;
const ROWS_PER_S = 60;
export const WAVE_ROWS = WAVE_SPAN_S * ROWS_PER_S;
/** A longer pause between two midlines stays empty, s. */
const GAP_S = 0.2;
const SHADES = 256;

export class WaveImage {
  readonly canvas = document.createElement("canvas");
  /** Hub time of the newest row, s; NaN while empty. */
  newestS = Number.NaN;
  readonly #context: CanvasRenderingContext2D;
  readonly #image: ImageData;
  readonly #pixels: Uint32Array;
  readonly #values = new Float32Array(WAVE_ROWS * WAVE_COLUMNS).fill(Number.NaN);
  /** Right to left displacement; then one for "nothing known". */
  readonly #shades = new Uint32Array(SHADES + 1);
  #half = 1;

  constructor() {
    this.canvas.width = WAVE_COLUMNS;
    this.canvas.height = WAVE_ROWS;
    this.#context = this.canvas.getContext("2d", { willReadFrequently: true })!;
    this.#image = this.#context.createImageData(WAVE_COLUMNS, WAVE_ROWS);
    this.#pixels = new Uint32Array(this.#image.data.buffer);
  }

  clear(): void {
    this.#values.fill(Number.NaN);
    this.newestS = Number.NaN;
    this.#colour(WAVE_ROWS);
  }

  /** Takes colours and the displacement that gets the full colour, m. */
  setScale(half: number, palette: Palette): void {
    this.#half = half;
    for (let i = 0; i < SHADES; i++) {
      const value = (i / (SHADES - 1)) * 2 - 1;
      const full = value > 0 ? palette.body[0] : palette.body[3];
      this.#shades[i] = pixel(mix(palette.ground, full, Math.abs(value)));
    }
    this.#shades[SHADES] = pixel(palette.ground);
    this.#colour(WAVE_ROWS);
  }

  /** Adds the rows that have come since the last call. @returns whether there were any */
  advance(past: PastMidlines): boolean {
    if (past.total === 0) return false;
    if (past.newestS < this.newestS) this.clear();
    if (Number.isNaN(this.newestS))
      this.newestS = Math.max(past.timeS(past.total - past.size), past.newestS - WAVE_SPAN_S);
    const due = Math.floor((past.newestS - this.newestS) * ROWS_PER_S + 1e-6);
    if (due <= 0) return false;
    const rows = Math.min(due, WAVE_ROWS);
    this.#values.copyWithin(rows * WAVE_COLUMNS, 0);
    this.#pixels.copyWithin(rows * WAVE_COLUMNS, 0);
    this.newestS += due / ROWS_PER_S;
    let entry = past.total - 1;
    for (let row = 0; row < rows; row++) {
      const timeS = this.newestS - row / ROWS_PER_S;
      while (entry > past.total - past.size && past.timeS(entry - 1) >= timeS) entry--;
      this.#fillRow(row, timeS, entry, past);
    }
    this.#colour(rows);
    return true;
  }

  /** One row between entry - 1 and entry, the first not before `timeS`. */
  #fillRow(row: number, timeS: number, entry: number, past: PastMidlines): void {
    const before = Math.max(entry - 1, past.total - past.size);
    const step = past.timeS(entry) - past.timeS(before);
    const known = step <= GAP_S && (past.timeS(entry) >= timeS || timeS - past.timeS(entry) < GAP_S);
    const share = step > 0 ? Math.min(1, Math.max(0, (timeS - past.timeS(before)) / step)) : 1;
    const last = past.pointCount - 1;
    for (let column = 0; column < WAVE_COLUMNS; column++) {
      const at = (column / (WAVE_COLUMNS - 1)) * last;
      const k = Math.min(Math.floor(at), last - 1);
      const older = lerp(past.sideways(before, k), past.sideways(before, k + 1), at - k);
      const newer = lerp(past.sideways(entry, k), past.sideways(entry, k + 1), at - k);
      this.#values[row * WAVE_COLUMNS + column] = known ? lerp(older, newer, share) : Number.NaN;
    }
  }

  /** Colours the newest rows and hands the image to the canvas. */
  #colour(rows: number): void {
    const scale = (SHADES - 1) / 2 / this.#half;
    for (let i = 0; i < rows * WAVE_COLUMNS; i++) {
      const value = this.#values[i];
      const shade = Math.round(value * scale + (SHADES - 1) / 2);
      this.#pixels[i] = this.#shades[Number.isNaN(value) ? SHADES : Math.min(SHADES - 1, Math.max(0, shade))];
    }
    this.#context.putImageData(this.#image, 0, 0);
  }
}

function lerp(a: number, b: number, share: number): number {
  return a + (b - a) * share;
}

/** 0xRRGGBB as an opaque pixel in memory order (little-endian machines: all that browsers run on). */
function pixel(rgb: number): number {
  return ((255 << 24) | ((rgb & 255) << 16) | (rgb & 0xff00) | (rgb >> 16)) >>> 0;
}
