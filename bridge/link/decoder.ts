/** The decoder for a rig's packets: native, text lines, or a declared layout. */
import type { Rig } from "../rig/load.ts";
import { DeclaredDecoder } from "./declared.ts";
import { compileLayout } from "./declared-compile.ts";
import { NativeDecoder } from "./native-decoder.ts";
import type { PacketDecoder, PacketSink } from "./packets.ts";
import { TextLineDecoder } from "./text.ts";

/**
 * @param sink is called for every packet, during push
 * @throws BendwatchError CONFIG_INVALID when a declared layout does not hold together for this rig
 */
export function createDecoder(rig: Rig, sink: PacketSink): PacketDecoder {
  const sensorCount = rig.sensors.length;
  if (rig.packetLayout !== null) {
    return new DeclaredDecoder(compileLayout(rig.packetLayout, sensorCount), sensorCount, sink);
  }
  return rig.hub.layout === "text"
    ? new TextLineDecoder(rig.models, sink)
    : new NativeDecoder(sensorCount, sink);
}
