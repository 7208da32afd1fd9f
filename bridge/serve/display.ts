/**
 * What the dashboard shows, taken from the pipeline at display rate: the binary frame, and the strip of the last ten
 * minutes at one column a second.
 */
import type { Pipeline } from "../pipeline.ts";
import { POINT_COUNT } from "../stages.ts";
import { createDisplayFrame, type DisplayFrame, encodeFrame, frameBytes } from "../wire/frame.ts";
import type { StripMessage } from "../wire/messages.ts";

export class FrameWriter {
  readonly #frame: DisplayFrame;
  readonly #bytes: Uint8Array;
  readonly #view: DataView;

  constructor(sensorCount: number) {
    this.#frame = createDisplayFrame(POINT_COUNT, sensorCount);
    this.#bytes = new Uint8Array(frameBytes(POINT_COUNT, sensorCount));
    this.#view = new DataView(this.#bytes.buffer);
  }

  /** The newest sweep as a frame. The bytes are borrowed: the next call overwrites them. */
  write(pipeline: Pipeline, conditions: Uint8Array): Uint8Array {
    const frame = this.#frame;
    const { health, fusion, midline, travel, tailbeat } = pipeline;
    frame.frameNumber = (frame.frameNumber + 1) >>> 0;
    frame.sweepCount = pipeline.sweepCount;
    frame.hubTimeS = pipeline.timeS;
    frame.hostTimeMs = pipeline.hostTimeMs;
    frame.travelHeading = travel.heading;
    frame.tailbeatPhase = tailbeat.frequencyHz === null ? Number.NaN : tailbeat.phase;
    travel.toTravelAxes(midline.positions, frame.midline);
    midline.rollInto(frame.roll);
    for (let i = 0; i < frame.sensorCount; i++) {
      frame.sensorNumbers[4 * i] = health.gyroHeadroom[i]!;
      frame.sensorNumbers[4 * i + 1] = health.accelHeadroom[i]!;
      frame.sensorNumbers[4 * i + 2] = health.fieldOff[i]!;
      frame.sensorNumbers[4 * i + 3] = health.delivered60[i]!;
      frame.sensorStates[2 * i] = fusion.trust[i]!;
      frame.sensorStates[2 * i + 1] = conditions[i]!;
    }
    encodeFrame(frame, this.#view);
    return this.#bytes;
  }
}

const STRIP_COLUMNS = 600;
const COLUMN_S = 1;

/** Lowest and highest tail excursion of each second of the last ten minutes. */
export class Strip {
  readonly #low = new Float64Array(STRIP_COLUMNS).fill(Number.NaN);
  readonly #high = new Float64Array(STRIP_COLUMNS).fill(Number.NaN);
  /** Column of the newest sweep, counted from the start of the run. */
  #newest = -1;

  add(timeS: number, tailM: number): void {
    const column = Math.floor(timeS / COLUMN_S);
    if (column > this.#newest) {
      const firstNew = Math.max(this.#newest + 1, column - STRIP_COLUMNS + 1);
      for (let c = firstNew; c <= column; c++) {
        this.#low[c % STRIP_COLUMNS] = Number.NaN;
        this.#high[c % STRIP_COLUMNS] = Number.NaN;
      }
      this.#newest = column;
    }
    const at = column % STRIP_COLUMNS;
    // Written so that a comparison with NaN, an empty column, takes the new value.
    if (!(this.#low[at]! <= tailM)) this.#low[at] = tailM;
    if (!(this.#high[at]! >= tailM)) this.#high[at] = tailM;
  }

  message(): StripMessage {
    const first = Math.max(0, this.#newest - STRIP_COLUMNS + 1);
    const lowM: (number | null)[] = [];
    const highM: (number | null)[] = [];
    for (let c = first; c <= this.#newest; c++) {
      lowM.push(rounded(this.#low[c % STRIP_COLUMNS]!));
      highM.push(rounded(this.#high[c % STRIP_COLUMNS]!));
    }
    return { type: "strip", startS: first * COLUMN_S, columnS: COLUMN_S, lowM, highM };
  }
}

/** To 0.1 mm, far below what the strip can show; null for an empty column. */
function rounded(metres: number): number | null {
  return Number.isNaN(metres) ? null : Math.round(metres * 1e4) / 1e4;
}
