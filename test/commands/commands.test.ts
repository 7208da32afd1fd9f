/** The other commands as a user runs them: replay, rehearse, export, verify, and what is said when something is wrong. */
import { cpSync, existsSync, readFileSync, truncateSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { packageRoot } from "../../bridge/paths.ts";
import { bendwatch, startBridge, viewStream } from "../support/bridge-process.ts";
import { fingerprints, temporaryFolder, writeRig } from "../support/folders.ts";

const healthy = join(packageRoot, "recordings", "healthy-demo");

test("the bundled trial, looped, moves within five seconds of the address being printed, on one line", async () => {
  const bridge = await startBridge("replay", healthy, "--loop");
  expect(bridge.out()).toBe(`Bendwatch: ${bridge.address}\n`);
  const began = performance.now();
  const viewer = await viewStream(bridge.address);
  await viewer.until((v) => v.frames > 2);
  const tail = viewer.frame.midline.at(-2)!;
  await viewer.until((v) => Math.abs(v.frame.midline.at(-2)! - tail) > 0.005);
  expect(performance.now() - began).toBeLessThan(5000);
  expect(viewer.welcome?.source).toEqual({ kind: "trial", label: "trial healthy-demo" });
});

test("a looped trial starts over: hub time too, under a new run", async () => {
  const short = join(temporaryFolder(), "short");
  const args = [
    "--rig",
    "ribbon-foil",
    "--seconds",
    "4",
    "--record",
    short,
    "--rate",
    "max",
    "--no-dashboard",
  ];
  expect((await bendwatch("rehearse", ...args)).out).toBe(`400 sweeps recorded as ${short}\n`);
  const bridge = await startBridge("replay", short, "--loop", "--rate", "4");
  const viewer = await viewStream(bridge.address);
  await viewer.until((v) => v.frame.hubTimeS > 3);
  const first = viewer.welcome?.runId;
  await viewer.until((v) => v.welcome?.runId !== first && v.frame.hubTimeS < 2);
});

test("a truncated trial replays and exports up to the cut; verify says where it is cut", async () => {
  const cut = join(temporaryFolder(), "cut");
  cpSync(healthy, cut, { recursive: true });
  const packets = join(cut, "packets.cborseq");
  truncateSync(packets, Math.floor(readFileSync(packets).length / 2) + 1);
  const exported = await bendwatch("export", cut, "--to", join(cut, "tables"));
  expect(exported.code).toBe(0);
  expect(exported.out).toMatch(/^3\d{3} sweeps written/);
  const verified = await bendwatch("verify", cut);
  expect(verified.code).toBe(1);
  expect(verified.out).toMatch(/cut|truncated/i);
  const replayed = await startBridge("replay", cut, "--rate", "max");
  const viewer = await viewStream(replayed.address);
  await viewer.until((v) => v.status?.link === "ended");
});

test("verify finds a flipped bit and names its range", async () => {
  const flipped = join(temporaryFolder(), "flipped");
  cpSync(healthy, flipped, { recursive: true });
  const packets = join(flipped, "packets.cborseq");
  const bytes = readFileSync(packets);
  bytes[100_000]! ^= 0x10;
  writeFileSync(packets, bytes);
  const { code, out } = await bendwatch("verify", flipped);
  expect(code).toBe(1);
  const [from, to] = /(\d+)\D+(\d+)/
    .exec(out.slice(out.search(/bytes? \d+/)))!
    .slice(1)
    .map(Number);
  expect(from).toBeLessThanOrEqual(100_000);
  expect(to).toBeGreaterThan(100_000);
  expect(await bendwatch("verify", healthy)).toMatchObject({ code: 0 });
});

test("two exports of one trial are the same, byte for byte", async () => {
  const [first, second] = [join(temporaryFolder(), "a"), join(temporaryFolder(), "b")];
  await bendwatch("export", healthy, "--to", first);
  await bendwatch("export", healthy, "--to", second);
  expect(Object.keys(fingerprints(first))).toContain("midline.csv");
  expect(fingerprints(second)).toEqual(fingerprints(first));
});

test("a bad rig file is refused with file, key, what was found and expected, all at once", async () => {
  const path = writeRig("ribbon-foil", (rig) => {
    rig.sensors[2]!.station = 0.1;
    rig.hub.rateKHz = 0.1;
  });
  const { code, err } = await bendwatch("rehearse", "--rig", path);
  expect(code).toBe(2);
  expect(err).toMatch(/^CONFIG_INVALID/);
  expect(err).toMatch(`${path}, sensors[2].station: found 0.1; expected a station greater than 0.24`);
  expect(err).toMatch(/hub\.rateKHz: found a key that is not known/);
});

test("a sensor model that is not there is named with the sensor that wants it", async () => {
  const path = writeRig("ribbon-foil", (rig) => {
    rig.sensors[4]!.model = "no-such-unit";
  });
  const { code, err } = await bendwatch("rehearse", "--rig", path);
  expect(code).toBe(2);
  expect(err).toMatch(/sensors\[4\]\.model: .*no-such-unit\.json: found ENOENT/);
});

test.each([
  [["swim"], /unknown command 'swim'/],
  [["replay"], /missing required argument 'trial'/],
  [["rehearse", "--rig", "ribbon-foil", "--fault", "ghost@1+1"], /one of magnet, field, plate/],
  [["rehearse", "--rig", "ribbon-foil", "--no-dashboard"], /COMMAND_INVALID/],
  [["replay", "no-such-trial"], /TRIAL_UNREADABLE/],
  [["live", "--rig", "ribbon-foil", "--no-record"], /PORT_NOT_FOUND/],
  [["replay", healthy, "--host", "0.0.0.0"], /ACCESS_UNSAFE/],
])("%j is refused with a reason, exit code 2", async (args, reason) => {
  const { code, err } = await bendwatch(...args);
  expect(code).toBe(2);
  expect(err).toMatch(reason);
});

test("an address in use is said so", async () => {
  const first = await startBridge("replay", healthy);
  const port = new URL(first.address).port;
  const { code, err } = await bendwatch("replay", healthy, "--http-port", port);
  expect(code).toBe(2);
  expect(err).toMatch(`127.0.0.1:${port}: found EADDRINUSE`);
});

test("a trial is never overwritten", async () => {
  const args = [
    "rehearse",
    "--rig",
    "ribbon-foil",
    "--seconds",
    "1",
    "--rate",
    "max",
    "--no-dashboard",
    "--record",
  ];
  const { code, err } = await bendwatch(...args, healthy);
  expect(code).toBe(2);
  expect(err).toMatch(/TRIAL_EXISTS/);
  expect(existsSync(join(healthy, "trial.json"))).toBe(true);
});
