/** The report as one HTML page that needs nothing else: to be read, kept and printed. */
import type { CheckFigure, CheckVerdict, StepState } from "../wire/check.ts";
import { html, Markup } from "./markup.ts";
import { PAGE_STYLE } from "./page-style.ts";
import { bars, coverage, glyph, ruler, supplyCourse } from "./plots.ts";
import type { CheckReport, ReportStep } from "./report.ts";

const VERDICTS: Readonly<Record<CheckVerdict, string>> = {
  go: "Go",
  "no-go": "No-go",
  incomplete: "Incomplete",
};
const VERDICT_GLYPHS = { go: "good", "no-go": "alarm", incomplete: "caution" } as const;
const STATE_GLYPHS: Readonly<Record<StepState, "good" | "caution" | "alarm" | "none">> = {
  passed: "good",
  failed: "alarm",
  "not done": "caution",
  "under way": "caution",
  "not begun": "caution",
  "not needed": "none",
};
const STEP_TITLES: Readonly<Record<ReportStep["step"], string>> = {
  link: "Link",
  rest: "Rest",
  "turn-through": "Turn-through",
  bend: "Bend",
  range: "Range",
  supply: "Supply",
  clock: "Clock",
};

/** @returns the whole document */
export function checkPage(report: CheckReport): string {
  const { rig, recording, verdict } = report;
  return html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${VERDICTS[verdict]}: release check of ${rig.name}, ${recording.trial}</title>
<style>${new Markup(PAGE_STYLE)}</style>
</head>
<body>
<header class="head"><h1>Release check · ${rig.name}</h1><p class="soft">${when(report.endedAt ?? report.begunAt ?? recording.startedAt)}</p></header>
<main>
${verdictPart(report)}
${sensorsPart(report)}
${report.steps.map((step, i) => stepPart(report, step, i + 1))}
${flagsPart(report)}
${calibrationPart(report)}
${provenancePart(report)}
</main>
</body>
</html>
`.text;
}

function verdictPart(report: CheckReport): Markup {
  const { verdict, reasons, cautions, operator } = report;
  const list = reasons.map(
    ({ steps, sensor, text }) =>
      html`<li><span><b>${sensor ?? "whole rig"}</b> <span class="soft">${steps.join(", ")}</span></span><span>${text}</span></li>`,
  );
  return html`<p class="verdict ${verdict}">${glyph(VERDICT_GLYPHS[verdict])}${VERDICTS[verdict]}</p>
${verdict === "go" ? html`<p>Every step passed${takenOut(report).length > 0 ? ", but for the sensors taken out on purpose" : ""}.</p>` : html`<ul class="reasons">${list}</ul>`}
${cautions.map((caution) => html`<p class="caution">${caution}</p>`)}
<dl class="facts">
<dt>Operator</dt><dd>${operator || "not given"}</dd>
<dt>Begun, ended</dt><dd>${when(report.begunAt)}, ${when(report.endedAt)}</dd>
<dt>Trial</dt><dd>${report.recording.trial}</dd>
<dt>Body</dt><dd>${report.rig.body.kind}, ${report.rig.body.lengthMm} mm; ${report.rig.rateHz} sweeps a second</dd>
<dt>Taken out on purpose</dt><dd>${takenOut(report).join(", ") || "none"}</dd>
${report.recording.notes === "" ? null : html`<dt>Notes</dt><dd>${report.recording.notes}</dd>`}
</dl>`;
}

function sensorsPart(report: CheckReport): Markup {
  const bad = new Set(report.reasons.flatMap(({ sensor }) => (sensor === null ? [] : [sensor])));
  const rows = report.sensors.map(({ name, serial, station, model, takenOut }) => {
    const state = takenOut
      ? "taken out on purpose"
      : bad.has(name)
        ? "see reasons"
        : report.verdict === "go"
          ? "good"
          : "nothing against it";
    return html`<tr${takenOut ? new Markup(' class="out"') : null}><td>${name}</td><td>${serial || "not given"}</td><td class="number">${Math.round(station * 100)} %</td><td>${model}</td><td${bad.has(name) && !takenOut ? new Markup(' class="bad"') : null}>${state}</td></tr>`;
  });
  return html`<section><h2>Sensors</h2><figure>${ruler(report.sensors, bad)}</figure>
<table><thead><tr><th>Sensor</th><th>Serial number</th><th class="number">Place</th><th>Model</th><th>In this check</th></tr></thead><tbody>${rows}</tbody></table></section>`;
}

function stepPart(report: CheckReport, step: ReportStep, place: number): Markup {
  const { state, toDo, cautions, faults, missing, notes, attempts, begunS, endedS } = step;
  const open = state === "failed" ? faults : state === "not done" || state === "under way" ? missing : [];
  const span =
    begunS === null
      ? ""
      : `${begunS.toFixed(0)} to ${endedS === null ? "the end" : `${endedS.toFixed(0)} s`}`;
  const times = attempts > 1 ? `, time ${attempts}` : "";
  return html`<section><div class="intro"><div class="step-head"><h2>${place} ${STEP_TITLES[step.step]}</h2><span class="state ${state.replace(" ", "-")}">${glyph(STATE_GLYPHS[state])} ${state}</span></div>
<p>${toDo} <span class="soft">${span}${times}</span></p>
${cautions.map((caution) => html`<p class="caution small">${caution}</p>`)}</div>
${open.length === 0 ? null : html`<ul class="reasons">${open.map(({ sensor, text }) => html`<li><b>${sensor ?? "whole rig"}</b><span>${text}</span></li>`)}</ul>`}
${notes.map((note) => html`<p class="small soft">${note}</p>`)}
${rigFigures(step)}
${pictures(report, step)}
${sensorFigures(report, step)}</section>`;
}

/** Figures of the whole rig. */
function rigFigures({ figures }: ReportStep): Markup | null {
  const ofRig = figures.filter(({ sensor }) => sensor === null);
  if (ofRig.length === 0) return null;
  const rows = ofRig.map(
    (figure) =>
      html`<dt>${figure.name}</dt><dd${figure.ok ? null : new Markup(' class="bad"')}>${shownValue(figure)} <span class="soft">${limitsOf(figure)}</span></dd>`,
  );
  return html`<dl class="facts">${rows}</dl>`;
}

/** One row a sensor, one column a figure; limits that are every sensor's stand in the head. */
function sensorFigures({ sensors }: CheckReport, { figures }: ReportStep): Markup | null {
  const names = [...new Set(figures.filter(({ sensor }) => sensor !== null).map(({ name }) => name))];
  if (names.length === 0) return null;
  const shared = names.map((name) => {
    const limits = new Set(figures.filter((f) => f.name === name).map(limitsOf));
    return limits.size === 1 ? [...limits][0]! : null;
  });
  const rows = sensors.flatMap(({ name: sensor, takenOut }) => {
    if (takenOut) return [];
    const cells = names.map((name, k) => {
      const f = figures.find((figure) => figure.sensor === sensor && figure.name === name);
      if (f === undefined) return html`<td class="number soft">–</td>`;
      const own = shared[k] === null ? html` <span class="soft">${limitsOf(f)}</span>` : null;
      return html`<td class="number${f.ok ? null : " bad"}">${f.ok ? null : glyph("alarm")} ${shownValue(f)}${own}</td>`;
    });
    return [html`<tr><td>${sensor}</td>${cells}</tr>`];
  });
  const heads = names.map(
    (name, k) =>
      html`<th class="number">${name}${shared[k] === null ? null : html`<span class="limit">${shared[k]!}</span>`}</th>`,
  );
  return html`<table><thead><tr><th>Sensor</th>${heads}</tr></thead><tbody>${rows}</tbody></table>`;
}

function pictures(report: CheckReport, step: ReportStep): Markup | null {
  if (step.figures.length === 0) return null;
  const { sensors, traces } = report;
  switch (step.step) {
    case "rest":
      return html`<figure><figcaption>Noise of the gyroscopes; the tick is what is allowed.</figcaption>${bars(step, sensors, ["gyroscope noise"])}</figure>`;
    case "turn-through":
      return html`<figure><figcaption>Directions, all round and from below to above, that the field was seen from; hollow: not seen.</figcaption><div class="spheres">${sensors.flatMap(
        ({ name, takenOut }, i) =>
          takenOut || traces.seen[i] === undefined
            ? []
            : [html`<div>${name}${coverage(traces.seen[i], `Directions seen by ${name}`)}</div>`],
      )}</div></figure>`;
    case "range":
      return html`<figure><figcaption>Headroom of gyroscope (upper) and accelerometer, 0 to 100 %; the tick is the least allowed.</figcaption>${bars(step, sensors, ["gyroscope headroom", "accelerometer headroom"], 100)}</figure>`;
    case "supply": {
      const limit = step.figures.find(({ name }) => name === "lowest supply")?.least;
      const course = limit == null ? null : supplyCourse(traces.supply, limit);
      return course === null
        ? null
        : html`<figure><figcaption>Supply over the check, V.</figcaption>${course}</figure>`;
    }
    default:
      return null;
  }
}

function flagsPart({ flags }: CheckReport): Markup {
  if (flags.length === 0)
    return html`<section><h2>Flags</h2><p>None was raised from the first byte to the last.</p></section>`;
  const rows = flags.map(
    ({ kind, sensor, severity, startS, endS, detail }) =>
      html`<tr><td>${severity}</td><td>${kind}</td><td>${sensor ?? "whole rig"}</td><td class="number">${startS.toFixed(1)}</td><td class="number">${endS === null ? "open" : endS.toFixed(1)}</td><td>${detail}</td></tr>`,
  );
  return html`<section><h2>Flags</h2><table><thead><tr><th>Severity</th><th>Kind</th><th>Sensor</th><th class="number">From, s</th><th class="number">To, s</th><th>Detail</th></tr></thead><tbody>${rows}</tbody></table></section>`;
}

function calibrationPart({ sensors }: CheckReport): Markup {
  const list = (values: readonly number[], digits: number) =>
    values.map((value) => value.toFixed(digits)).join(", ");
  const rows = sensors.map(({ name, mounting, calibration, records }) => {
    const from = records.map(({ kind, date }) => `${kind} of ${date.slice(0, 10)}`).join(", ");
    return html`<tr><td>${name}</td><td>${list(calibration.gyroBiasDegPerS, 3)}</td><td>${list(calibration.accelBiasMPerS2, 3)}</td><td>${list(calibration.magHardIronUT, 1)}</td><td>${list([mounting.yawDeg, mounting.pitchDeg, mounting.rollDeg], 1)}</td><td>${from || "the rig file"}</td></tr>`;
  });
  return html`<section><h2>Calibration in use</h2><table><thead><tr><th>Sensor</th><th>Gyroscope bias, °/s</th><th>Accelerometer bias, m/s²</th><th>Hard iron, µT</th><th>Mounting yaw, pitch, roll, °</th><th>From</th></tr></thead><tbody>${rows}</tbody></table>
<p class="small soft">Scales and soft iron stand in the JSON report beside this page.</p></section>`;
}

function provenancePart({ recording, softwareVersion }: CheckReport): Markup {
  return html`<section><h2>Recording</h2><dl class="facts">
<dt>From</dt><dd>${recording.origin}</dd>
<dt>Started</dt><dd>${when(recording.startedAt)}</dd>
<dt>Software</dt><dd>Bendwatch ${softwareVersion}; recorded by ${recording.softwareVersion}</dd>
<dt>Packets</dt><dd>${recording.bytes} bytes${recording.problem === null ? "" : `; ${recording.problem}`}</dd>
<dt>SHA-256</dt><dd class="hash">${recording.sha256}</dd>
</dl><p class="small soft">Whoever has the recording can work out this report again: bendwatch check, with the trial's name.</p></section>`;
}

function takenOut({ sensors }: CheckReport): string[] {
  return sensors.filter(({ takenOut }) => takenOut).map(({ name }) => name);
}

function shownValue({ value, digits, unit }: Pick<CheckFigure, "value" | "digits" | "unit">): string {
  return value === null ? "not known" : `${number(value, digits)}${unit === "" ? "" : ` ${unit}`}`;
}

function limitsOf({ least, most, digits }: Pick<CheckFigure, "least" | "most" | "digits">): string {
  if (least !== null && most !== null) {
    return least === -most
      ? `within ±${number(most, digits)}`
      : `${number(least, digits)} to ${number(most, digits)}`;
  }
  if (least !== null) return `at least ${number(least, digits)}`;
  return most === null ? "" : `at most ${number(most, digits)}`;
}

/** With a minus sign of a digit's width. */
function number(value: number, digits: number): string {
  return value.toFixed(digits).replace("-", "−");
}

/** UTC, to the second. */
function when(iso: string | null): string {
  return iso === null ? "not known" : `${iso.slice(0, 10)} ${iso.slice(11, 19)} UTC`;
}
