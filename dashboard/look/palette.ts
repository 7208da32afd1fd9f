/** The colours in use, read from the style sheet: the canvas and the page share one list of tokens. */

/** RGB as 0xRRGGBB. */
export interface Palette {
  readonly ground: number;
  readonly ink: number;
  readonly soft: number;
  readonly hairline: number;
  readonly faint: number;
  readonly notice: number;
  readonly caution: number;
  readonly alarm: number;
  /** Nose to tail, evenly spaced. */
  readonly body: readonly number[];
}

/** Reads the tokens as they hold now for the whole page. */
export function readPalette(): Palette {
  const style = getComputedStyle(document.documentElement);
  const token = (name: string) => Number.parseInt(style.getPropertyValue(`--${name}`).trim().slice(1), 16);
  return {
    ground: token("ground"),
    ink: token("ink"),
    soft: token("soft"),
    hairline: token("hairline"),
    faint: token("faint"),
    notice: token("notice"),
    caution: token("caution"),
    alarm: token("alarm"),
    body: [1, 2, 3, 4, 5].map((i) => token(`body-${i}`)),
  };
}

/** `share` of the way from one colour to the other, 0..1. */
export function mix(from: number, to: number, share: number): number {
  const part = (shift: number) => {
    const a = (from >> shift) & 255;
    const b = (to >> shift) & 255;
    return Math.round(a + (b - a) * share) << shift;
  };
  return part(16) | part(8) | part(0);
}

/** Colour of the body at a station, 0 nose to 1 tail. */
export function bodyColour(body: readonly number[], station: number): number {
  const at = Math.min(Math.max(station, 0), 1) * (body.length - 1);
  const i = Math.min(Math.floor(at), body.length - 2);
  return mix(body[i], body[i + 1], at - i);
}
