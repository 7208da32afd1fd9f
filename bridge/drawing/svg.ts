/** Pieces of an SVG document as text. Lengths in its own units, pixels at natural size. */

export interface Point {
  readonly x: number;
  readonly y: number;
}

/** @param style attributes as they stand, e.g. `class="soft"` */
export function text(x: number, y: number, content: string, style = ""): string {
  return `<text x="${tenth(x)}" y="${tenth(y)}" ${style}>${escaped(content)}</text>`;
}

export function line(from: Point, to: Point, style: string): string {
  return `<path d="${course([from, to])}" ${style}/>`;
}

export function polyline(points: readonly Point[], style: string): string {
  return `<path d="${course(points)}" fill="none" ${style}/>`;
}

/** The area between two lines of as many points. */
export function area(one: readonly Point[], other: readonly Point[], style: string): string {
  return `<path d="${course([...one, ...[...other].reverse()])}Z" ${style}/>`;
}

/** A triangle that points up at (x, y). */
export function pointer(x: number, y: number, half: number, style: string): string {
  const foot = y + 1.8 * half;
  return `<path d="${course([
    { x, y },
    { x: x + half, y: foot },
    { x: x - half, y: foot },
  ])}Z" ${style}/>`;
}

/** Signs of the language as numbers; control characters, which XML cannot hold, as the replacement character. */
export function escaped(content: string): string {
  return content.replace(/\p{Cc}/gu, "\ufffd").replace(/[&<>"]/g, (sign) => `&#${sign.charCodeAt(0)};`);
}

function course(points: readonly Point[]): string {
  return points.map(({ x, y }, i) => `${i === 0 ? "M" : "L"}${tenth(x)} ${tenth(y)}`).join("");
}

function tenth(value: number): string {
  return `${Math.round(10 * value) / 10}`;
}
