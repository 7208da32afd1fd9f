/** The gait numbers of the newest cycle as viewers get them. */
import type { GaitMeter } from "../wave/gait.ts";
import { doubtWords, GAIT_NUMBERS, type GaitNumber } from "../wire/gait.ts";
import type { GaitNumberView, TailbeatView } from "../wire/messages.ts";

export function tailbeatView({ tailbeat, cycle, bout }: GaitMeter): TailbeatView {
  const beats = tailbeat.periodS !== null;
  const views = GAIT_NUMBERS.map((name): [GaitNumber, GaitNumberView] => {
    // Doubts of a body at rest would be those of its last cycle.
    if (!beats) return [name, { value: null, spread: null, doubts: [] }];
    const { numbers, spread, doubts } = cycle;
    return [
      name,
      { value: known(numbers[name]), spread: known(spread[name]), doubts: doubtWords(doubts[name]) },
    ];
  });
  const numbers = Object.fromEntries(views) as Record<GaitNumber, GaitNumberView>;
  return { numbers, steadyCycles: bout.cycles, steady: bout.steady };
}

/** JSON has no word for not-a-number and infinities. */
function known(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
