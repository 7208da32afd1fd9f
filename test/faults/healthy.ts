/**
 * Healthy swimming of all sorts, seeded: gaits, paces, rests, turns and postures differ from one to the next, sensors have
 * the offsets their data sheets allow, and nothing is wrong. Any flag is a false one.
 */
import { Random } from "../../bridge/rehearsal/random.ts";
import type { PaceChange, SwimmerOptions, Turn } from "../../bridge/rehearsal/swimmer-options.ts";

/** One pace or rest lasts so long, s. */
const SPELL_S = [15, 60] as const;
/** Of spells, those in which the body lies still. */
const REST_SHARE = 0.25;

/** A swimmer for `durationS`. Paces stay where no gyroscope of ±1000 °/s comes near the end of its range. */
export function healthySwimmer(seed: number, durationS: number): Partial<SwimmerOptions> {
  const random = Random.forStream(seed, 1000);
  const changes: PaceChange[] = [];
  const turns: Turn[] = [];
  let timeS = random.between(...SPELL_S);
  while (timeS < durationS) {
    const overS = random.between(2, 5);
    const amplitude = random.uniform() < REST_SHARE ? 0 : random.between(0.4, 1);
    changes.push({ atS: timeS, overS, amplitude, frequencyHz: random.between(0.6, 2.2) });
    if (random.uniform() < 0.5) turns.push({ atS: timeS + overS, overS: 8, by: random.between(-1.5, 1.5) });
    timeS += overS + 8 + random.between(...SPELL_S);
  }
  return {
    gait: random.uniform() < 0.5 ? "carangiform" : "anguilliform",
    frequencyHz: random.between(0.6, 2.2),
    amplitude: random.between(0.5, 1),
    restS: random.between(1, 12),
    startS: 3,
    heading: random.between(-3, 3),
    changes,
    turns,
  };
}
