/** bendwatch ports: what is connected. */
import type { Command } from "commander";
import { describePorts, listPorts } from "../link/ports.ts";

export function addPorts(program: Command): void {
  program
    .command("ports")
    .description("List the serial ports of this machine.")
    .action(async () => console.log(describePorts(await listPorts())));
}
