/** Numbers and times as the screen says them. */

/** 04:17, or 1:04:17. */
export function clock(seconds: number): string {
  const whole = Math.max(0, Math.floor(seconds));
  const two = (n: number) => String(n).padStart(2, "0");
  const hours = Math.floor(whole / 3600);
  const rest = `${two(Math.floor(whole / 60) % 60)}:${two(whole % 60)}`;
  return hours > 0 ? `${hours}:${rest}` : rest;
}

/** "0.3 s", "12 s", "3 min", "2 h". */
export function duration(seconds: number): string {
  if (seconds < 10) return `${Math.max(0, seconds).toFixed(1)} s`;
  if (seconds < 100) return `${Math.round(seconds)} s`;
  if (seconds < 5400) return `${Math.round(seconds / 60)} min`;
  return `${Math.round(seconds / 3600)} h`;
}

/** A share in whole per cent. */
export function percent(share: number): string {
  return `${Math.round(share * 100)} %`;
}

/** A share in hundredths of a per cent, where one lost sample in a thousand matters. */
export function finePercent(share: number): string {
  return `${(share * 100).toFixed(2)} %`;
}

/** Writes text only where it changed, so that nothing is laid out for nothing. */
export function setText(element: Element, text: string): void {
  if (element.textContent !== text) element.textContent = text;
}
