/** The largest rig: 64 sensors at 1000 sweeps a second. */
import { loadRig, type Rig } from "../../../bridge/rig/load.ts";

export function rigOf64(): Rig {
  const base = loadRig("long-dummy");
  const places = Array.from({ length: 64 }, (_, i) => ({
    ...base.sensors[0]!,
    name: `S${i + 1}`,
    station: Number((0.01 + i * 0.0155).toFixed(4)),
  }));
  return {
    ...base,
    name: "Long chain",
    hub: { ...base.hub, rateHz: 1000, baudRate: 12_000_000 },
    sensors: places,
    models: places.map(() => base.models[0]!),
  };
}
