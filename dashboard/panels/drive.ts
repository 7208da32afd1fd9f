/**
 * The body beside its drive: lag, gain and correlation of the sensor next to it, and the loop its yaw draws against the
 * drive's. Without a drive in the rig file, the hub's raw readings.
 */
import type { BesideView, DriveMessage, WelcomeMessage } from "../../bridge/wire/messages.ts";
import { isLive, type ViewState } from "../stream/view-state.ts";
import { count, millimetres, setText } from "./text.ts";

const DEG_PER_RAD = 180 / Math.PI;
/** How far the loop reaches from the middle of its picture, which is 100 wide. */
const REACH = 46;

export class DrivePanel {
  readonly #host: HTMLElement;
  readonly #how: HTMLElement;
  readonly #rows: readonly HTMLElement[];
  readonly #figures: HTMLElement;
  readonly #picture: SVGElement;
  readonly #curve: SVGElement;
  readonly #note: HTMLElement;

  constructor(host: HTMLElement) {
    this.#host = host;
    host.innerHTML = `<div class="heading"><h2>Beside the drive</h2><span class="soft how"></span></div>
      <div class="beside">
        <dl class="numbers"></dl>
        <svg viewBox="-50 -50 100 100" role="img">
          <path class="axes" d="M-50 0H50M0 -50V50" /><path class="equal" d="M-46 46L46 -46" /><path class="curve" />
        </svg>
      </div>
      <p class="soft note"></p>`;
    this.#how = host.querySelector(".how")!;
    this.#figures = host.querySelector("dl")!;
    this.#picture = host.querySelector("svg")!;
    this.#curve = host.querySelector(".curve")!;
    this.#note = host.querySelector(".note")!;
    this.#rows = ROWS.map(({ name, meaning }) => {
      const term = document.createElement("dt");
      term.textContent = name;
      term.title = meaning;
      const value = document.createElement("dd");
      this.#figures.append(term, value);
      return value;
    });
  }

  update(view: ViewState): void {
    const { drive, welcome } = view;
    this.#host.hidden = drive === null;
    if (drive === null) return;
    const beside = drive.sensors[drive.nearest] ?? null;
    setText(this.#how, drive.named ? howFound(drive, isLive(view)) : "");
    this.#figures.hidden = !drive.named;
    ROWS.forEach(({ value }, i) => {
      setText(this.#rows[i], beside === null ? "–" : value(beside));
    });
    this.#drawLoop(drive, nameOf(drive, welcome));
    setText(this.#note, drive.named ? noteOf(drive, welcome) : rawReading(drive));
  }

  #drawLoop({ loop, named }: DriveMessage, sensor: string): void {
    this.#picture.toggleAttribute("hidden", !named);
    this.#curve.setAttribute("d", loop === null ? "" : pathOf(loop.reference, loop.measured));
    const area = loop === null ? "none yet" : `area ${squareDegrees(loop.area)}`;
    this.#picture.setAttribute("aria-label", `Loop of the drive's yaw against that of ${sensor}: ${area}`);
  }
}

const ROWS: readonly {
  readonly name: string;
  readonly meaning: string;
  readonly value: (beside: BesideView) => string;
}[] = [
  {
    name: "Lag",
    meaning: "how long after the drive the sensor yaws",
    value: ({ lagS }) => `${(lagS * 1000).toFixed(1)} ms`,
  },
  { name: "Gain", meaning: "amplitude of yaw over the drive's", value: ({ gain }) => gain.toFixed(3) },
  { name: "r²", meaning: "correlation squared, with the lag taken off", value: ({ r2 }) => r2.toFixed(3) },
  {
    name: "RMSE",
    meaning: "root mean square of the difference in yaw, mean and drift taken off",
    value: ({ rmse }) => `${(rmse * DEG_PER_RAD).toFixed(2)}°`,
  },
];

function howFound({ method, cycles, windowS }: DriveMessage, live: boolean): string {
  if (method === null) return live ? "drive at rest" : "";
  return method === "whole cycles"
    ? `over ${count(cycles, "cycle", "cycles")}`
    : `over ${windowS.toFixed(0)} s, least squares`;
}

function nameOf({ nearest }: DriveMessage, welcome: WelcomeMessage | null): string {
  return welcome?.sensors[nearest]?.name ?? `sensor ${nearest + 1}`;
}

/** Which sensor the numbers are of, and the loop's area. */
function noteOf(drive: DriveMessage, welcome: WelcomeMessage | null): string {
  const area = drive.loop === null ? "" : `; loop ${squareDegrees(drive.loop.area)}`;
  return `Yaw of ${nameOf(drive, welcome)} against the drive's${area}`;
}

function rawReading({ yaw, sway }: DriveMessage): string {
  const parts = [
    yaw === null ? "" : `yaw ${(yaw * DEG_PER_RAD).toFixed(1)}°`,
    sway === null ? "" : `sway ${millimetres(sway)}`,
  ];
  return `As it says: ${parts.filter((part) => part !== "").join(", ")}. The rig file names no drive.`;
}

function squareDegrees(area: number): string {
  return `${(area * DEG_PER_RAD ** 2).toFixed(1)} deg²`;
}

/** A closed curve, both directions on one scale, so that equal yaw lies on the diagonal. */
function pathOf(across: readonly number[], up: readonly number[]): string {
  const reach = Math.max(...across.map(Math.abs), ...up.map(Math.abs), Number.MIN_VALUE);
  const place = (value: number) => ((value / reach) * REACH).toFixed(1);
  return `M${across.map((x, i) => `${place(x)} ${place(-up[i])}`).join("L")}Z`;
}
