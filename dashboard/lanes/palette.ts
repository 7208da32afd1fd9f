/** The colours of the light that is on, from the style sheet's tokens, as numbers for drawing. */

export interface Palette {
  readonly ground: number;
  readonly ink: number;
  readonly soft: number;
  readonly hairline: number;
  readonly faint: number;
  readonly notice: number;
  readonly caution: number;
  readonly alarm: number;
  /** Along the body, nose to tail. */
  readonly body: readonly number[];
}

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
    body: [0, 1, 2, 3, 4].map((i) => token(`body-${i}`)),
  };
}

/** Between two colours, channel by channel. */
export function mix(from: number, to: number, share: number): number {
  const channel = (shift: number) => {
    const a = (from >> shift) & 255;
    const b = (to >> shift) & 255;
    return Math.round(a + (b - a) * share) << shift;
  };
  return channel(16) | channel(8) | channel(0);
}

/** The colour at a station, 0 nose to 1 tail tip. */
export function bodyColour({ body }: Palette, station: number): number {
  const at = Math.min(Math.max(station, 0), 1) * (body.length - 1);
  const below = Math.min(Math.floor(at), body.length - 2);
  return mix(body[below]!, body[below + 1]!, at - below);
}
