/** A body that goes through the steps of a release check: it lies still, is turned through, bends, and moves hard. */
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { SwimmerOptions } from "./swimmer-options.ts";

/** Of the rehearsal, s. */
export const CHECK_SCRIPT = {
  /** Still until here: link and rest. */
  turnS: 26,
  /** Straight and still again from here. */
  straightS: 68,
  bendS: 73,
  hardS: 89,
  /** Still to the end. */
  endS: 101,
} as const;

const { turnS, straightS, bendS, hardS, endS } = CHECK_SCRIPT;
/** Rolled over so often while the nose goes from down to up: the field looks out of nearly every side. */
const ROLLS = 7;
const STEEPEST = 75 * RAD_PER_DEG;
const TIP_S = 3;
const LEVEL = { amplitude: 0, periodS: 60 };

/** @param hardHz beats a second while it moves hard */
export function checkScript(hardHz = 2): Partial<SwimmerOptions> {
  const turnedS = straightS - TIP_S;
  return {
    amplitude: 0,
    headingWander: LEVEL,
    pitchWander: LEVEL,
    rollWander: LEVEL,
    rollTurns: [{ atS: turnS, overS: straightS - turnS, by: ROLLS * 2 * Math.PI }],
    pitchTurns: [
      { atS: turnS, overS: TIP_S, by: -STEEPEST },
      { atS: turnS + TIP_S, overS: turnedS - turnS - TIP_S, by: 2 * STEEPEST },
      { atS: turnedS, overS: TIP_S, by: -STEEPEST },
    ],
    changes: [
      { atS: bendS, overS: 2, amplitude: 1 },
      { atS: hardS, overS: 2, frequencyHz: hardHz },
      { atS: endS - 2, overS: 2, amplitude: 0 },
    ],
  };
}
