/** Runs a monitor for a command: prints the one line with the address, ends cleanly on Ctrl-C. */
import { Monitor, type MonitorOptions } from "../serve/monitor.ts";
import type { ServeOptions } from "./options.ts";
import { dashboardFolder } from "./places.ts";

export type WatchOptions = Omit<MonitorOptions, "dashboardFolder" | "host" | "port" | "token">;

export async function watch(
  options: WatchOptions,
  serve: ServeOptions,
  prepare: (monitor: Monitor) => void = () => {},
): Promise<void> {
  const monitor = new Monitor({
    ...options,
    dashboardFolder,
    host: serve.host,
    port: serve.httpPort,
    token: serve.token,
  });
  prepare(monitor);
  const interrupted = new Promise<void>((resolve) => {
    for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"] as const) process.once(signal, () => resolve());
  });
  try {
    console.log(`Bendwatch: ${await monitor.listen()}`);
    // The dashboard stays up when the source has ended: the last state can still be looked at.
    await Promise.race([monitor.run().then(() => interrupted), interrupted]);
  } finally {
    await monitor.close();
  }
}
