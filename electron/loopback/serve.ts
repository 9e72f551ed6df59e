/** Starts the loopback host on the built window. */
import { configFolder, stateFolder } from '../files/places.ts';
import { WindowFiles } from '../window-files.ts';
import { LoopbackHost } from './server.ts';

export interface ServeOptions {
  /** The folder of the built window. */
  readonly windowFolder: string;
  readonly version: string;
  /** Files to open at start, absolute paths. */
  readonly files: readonly string[];
  /** Whether they are the demo. */
  readonly demo: boolean;
  readonly log: (message: string) => void;
  /** 0 for a port that the system picks. */
  readonly port?: number;
  readonly configFolder?: string;
  readonly stateFolder?: string;
  readonly contentLimit?: number;
}

/** Starts a host; `address()` of it is where a browser goes. @throws Error when the window is not built or nothing can listen. */
export async function serveLoopback(options: ServeOptions): Promise<LoopbackHost> {
  const host = new LoopbackHost({
    window: await WindowFiles.list(options.windowFolder),
    version: options.version,
    configFolder: options.configFolder ?? configFolder(),
    stateFolder: options.stateFolder ?? stateFolder(),
    log: options.log,
    ...(options.contentLimit === undefined ? {} : { contentLimit: options.contentLimit }),
  });
  await host.service.setStartFiles(options.files, options.demo);
  await host.listen(options.port ?? 0);
  return host;
}
