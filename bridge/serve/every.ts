/**
 * Calls `action` every `intervalMs`, also where that is no whole number of milliseconds: a late call is followed by an
 * earlier one, so the average holds; calls missed altogether are not made up for.
 * @returns a function that stops it
 */
export function every(intervalMs: number, action: () => void): () => void {
  let dueMs = performance.now() + intervalMs;
  let timer = setTimeout(tick, intervalMs);
  function tick(): void {
    action();
    const nowMs = performance.now();
    dueMs = Math.max(dueMs + intervalMs, nowMs);
    timer = setTimeout(tick, dueMs - nowMs);
  }
  return () => clearTimeout(timer);
}
