/** The loopback host over real HTTP: the contract. */
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { basename, join } from 'node:path';
import { loopbackHost } from '../../renderer/host-loopback.ts';
import { serveLoopback } from '../../electron/loopback/serve.ts';
import { admit, listenToEvents } from './loopback-client.ts';
import { type Harness, hostContract, type Machine } from './host-contract.ts';

function fileAt(path: string): File {
  return new File([readFileSync(path)], basename(path));
}

async function start(machine: Machine): Promise<Harness> {
  const windowFolder = mkdtempSync(join(machine.saveFolder, 'window-'));
  mkdirSync(join(windowFolder, 'assets'));
  writeFileSync(join(windowFolder, 'index.html'), '<!doctype html><title>Deasil</title>');
  const server = await serveLoopback({
    windowFolder,
    version: 'test',
    files: machine.files,
    demo: false,
    log: () => undefined,
    configFolder: machine.configFolder,
    stateFolder: machine.stateFolder,
  });
  const cookie = await admit(server);
  let picked: readonly string[] | null = null;
  let saved: { name: string; bytes: Uint8Array } | null = null;
  const ends: (() => void)[] = [];
  const host = loopbackHost({
    origin: server.origin,
    fetch: (input, init) =>
      fetch(input, {
        ...init,
        headers: { ...(init?.headers as Record<string, string>), Cookie: cookie, Origin: server.origin },
      }),
    openEvents(address, onMessage) {
      const end = listenToEvents(address, cookie, onMessage);
      ends.push(end);
      return end;
    },
    pickFiles: () => Promise.resolve((picked ?? []).map(fileAt)),
    download(name, bytes) {
      saved = { name, bytes };
    },
  });
  return {
    host,
    pick(paths) {
      picked = paths;
    },
    confirmSave: () => undefined,
    saved: () => Promise.resolve(saved),
    dropped: fileAt,
    async openWhileRunning(paths) {
      await server.service.openPaths(paths);
    },
    async close() {
      for (const end of ends) end();
      await server.close();
      rmSync(windowFolder, { recursive: true, force: true });
    },
  };
}

hostContract('loopback', start);
