/** What every implementation of `Host` must do, run against the loopback host over HTTP and the Electron host over its IPC. */
import { randomBytes } from 'node:crypto';
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { appendFile, rename, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import * as fc from 'fast-check';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { Host, HostEvent, HostFile } from '../../renderer/host.ts';
import { HostError } from '../../renderer/host-messages.ts';

/** A host under test with the machine around it. */
export interface Harness {
  readonly host: Host;
  /** What the person picks in the next open dialog; null cancels. */
  pick(paths: readonly string[] | null): void;
  /** Whether the next save dialog is confirmed (where there is one). */
  confirmSave(confirmed: boolean): void;
  /** What was saved last: its name and bytes. */
  saved(): Promise<{ name: string; bytes: Uint8Array } | null>;
  /** A file as the page gets it when it is dropped there. */
  dropped(path: string): File;
  /** Opens files while running, as a second start does. */
  openWhileRunning(paths: readonly string[]): Promise<void>;
  close(): Promise<void>;
}

export interface Machine {
  /** Files named at start. */
  readonly files: readonly string[];
  readonly configFolder: string;
  readonly stateFolder: string;
  /** Where the save dialog points. */
  readonly saveFolder: string;
}

const text = (bytes: Uint8Array): string => new TextDecoder().decode(bytes);
const bytesOf = (content: string): Uint8Array => new TextEncoder().encode(content);

/** The code with which a call fails. */
async function codeOf(call: Promise<unknown>): Promise<string> {
  try {
    await call;
  } catch (error) {
    if (error instanceof HostError) return error.code;
    throw error;
  }
  return 'no failure';
}

/** The next events that fit, or fewer after a while. */
function eventsOf(host: Host): {
  next(fits: (event: HostEvent) => boolean, patience?: number): Promise<HostEvent | null>;
  end(): void;
} {
  const seen: HostEvent[] = [];
  let wake: () => void = () => undefined;
  const end = host.onEvent(event => {
    seen.push(event);
    wake();
  });
  return {
    async next(fits, patience = 5000) {
      const limit = Date.now() + patience;
      for (;;) {
        const at = seen.findIndex(fits);
        if (at >= 0) return seen.splice(at, 1)[0]!;
        const left = limit - Date.now();
        if (left <= 0) return null;
        await new Promise<void>(resolve => {
          wake = resolve;
          setTimeout(resolve, left);
        });
      }
    },
    end,
  };
}

/** Longer than the watcher takes to find and settle a change, ms. */
const QUIET = 2000;

export function hostContract(name: string, start: (machine: Machine) => Promise<Harness>): void {
  describe(`the contract of the host: ${name}`, () => {
    let folder: string;
    /** Where the host keeps handed-over content. */
    let temporary: string;
    let earlierTemporary: string | undefined;
    let machine: Machine;
    let harness: Harness;
    let host: Host;
    let input: string;
    const content = 'first line\nsecond line\n';

    beforeEach(async () => {
      folder = mkdtempSync(join(tmpdir(), 'deasil-contract-'));
      temporary = join(folder, 'temporary');
      mkdirSync(temporary);
      earlierTemporary = process.env['TMPDIR'];
      process.env['TMPDIR'] = temporary;
      const saveFolder = join(folder, 'saved');
      mkdirSync(saveFolder);
      input = join(folder, 'poses.sdf');
      writeFileSync(input, content);
      machine = {
        files: [input],
        configFolder: join(folder, 'config'),
        stateFolder: join(folder, 'state'),
        saveFolder,
      };
      harness = await start(machine);
      host = harness.host;
    });

    afterEach(async () => {
      await harness.close();
      if (earlierTemporary === undefined) delete process.env['TMPDIR'];
      else process.env['TMPDIR'] = earlierTemporary;
      rmSync(folder, { recursive: true, force: true });
    });

    async function startFile(): Promise<HostFile> {
      const [file] = await host.startFiles();
      expect(file).toBeDefined();
      return file!;
    }

    async function restart(): Promise<void> {
      await harness.close();
      harness = await start(machine);
      host = harness.host;
    }

    test('says which shell it is', async () => {
      const info = await host.info();
      expect(['electron', 'loopback']).toContain(info.shell);
      expect(info.platform).toBe(process.platform);
      expect(info.version).not.toBe('');
    });

    test('gives the files named at start by name and size, without their path', async () => {
      const file = await startFile();
      expect(file).toEqual({ id: file.id, name: 'poses.sdf', size: content.length });
      expect(JSON.stringify(file)).not.toContain(folder);
    });

    test('reads any part of a file, less at its end, nothing beyond', async () => {
      const { id } = await startFile();
      expect(text(await host.read(id, 0, 1000))).toBe(content);
      expect(text(await host.read(id, 6, 4))).toBe('line');
      expect(text(await host.read(id, content.length - 2, 100))).toBe('e\n');
      expect((await host.read(id, content.length + 5, 100)).length).toBe(0);
      expect((await host.read(id, 0, 0)).length).toBe(0);
    });

    test('gives back handed-over content byte for byte, in parts of any size', async () => {
      await fc.assert(
        fc.asyncProperty(
          fc.uint8Array({ maxLength: 3000 }),
          fc.nat(3100),
          fc.nat(3100),
          async (bytes, offset, length) => {
            const file = await host.offer('pasted', bytes);
            expect(file.size).toBe(bytes.length);
            expect(await host.read(file.id, offset, length)).toEqual(bytes.slice(offset, offset + length));
          },
        ),
        { numRuns: 40 },
      );
    });

    test('takes over megabytes unharmed', async () => {
      const bytes = new Uint8Array(randomBytes(5_000_003));
      const file = await host.offer('large.sdf', bytes);
      expect(Buffer.compare(await host.read(file.id, 0, bytes.length), bytes)).toBe(0);
    });

    test('takes a dropped file', async () => {
      const other = join(folder, 'dropped.mol');
      writeFileSync(other, 'dropped');
      const file = await host.offerFile(harness.dropped(other));
      expect(file.name).toBe('dropped.mol');
      expect(text(await host.read(file.id, 0, 100))).toBe('dropped');
    });

    test.each(['../evil', 'a/b', 'a\\b', '..', '', 'a\u0000b', 'x'.repeat(300)])(
      'refuses %j as the name of handed-over content',
      async bad => {
        expect(await codeOf(host.offer(bad, bytesOf('x')))).toBe('bad-request');
      },
    );

    test('refuses a handle it did not give out, and what is no handle', async () => {
      expect(await codeOf(host.read('0'.repeat(32), 0, 10))).toBe('unknown-file');
      for (const bad of ['', input, '../poses.sdf', 'G'.repeat(32)]) {
        expect(await codeOf(host.read(bad, 0, 10))).toBe('bad-request');
        expect(await codeOf(host.readSession(bad))).toBe('bad-request');
        expect(await codeOf(host.writeSession(bad, '{}'))).toBe('bad-request');
        expect(await codeOf(host.watch(bad, true))).toBe('bad-request');
      }
    });

    test('refuses impossible parts', async () => {
      const { id } = await startFile();
      for (const [offset, length] of [
        [-1, 10],
        [0, -1],
        [0.5, 10],
        [Number.NaN, 10],
        [0, 1e12],
      ] as const) {
        expect(await codeOf(host.read(id, offset, length))).toBe('bad-request');
      }
    });

    test('tells when a file is replaced while it is read, and reads the new one from its beginning', async () => {
      const { id } = await startFile();
      await host.read(id, 0, 5);
      writeFileSync(join(folder, 'new'), 'another content, of another length\n');
      await rename(join(folder, 'new'), input);
      expect(await codeOf(host.read(id, 5, 5))).toBe('file-changed');
      expect(text(await host.read(id, 0, 100))).toBe('another content, of another length\n');
      expect(text(await host.read(id, 8, 7))).toBe('content');
    });

    test('tells when a file is gone', async () => {
      const { id } = await startFile();
      rmSync(input);
      await expect(host.read(id, 0, 5)).rejects.toThrow(/poses\.sdf.*no such file/);
      expect(await codeOf(host.read(id, 0, 5))).toBe('not-readable');
    });

    test('opens what the person picks, and nothing when cancelled', async () => {
      const other = join(folder, 'picked.cif');
      writeFileSync(other, 'data_x\n');
      harness.pick([other, input]);
      const files = await host.open();
      expect(files.map(file => file.name)).toEqual(['picked.cif', 'poses.sdf']);
      expect(text(await host.read(files[0]!.id, 0, 100))).toBe('data_x\n');
      harness.pick(null);
      expect(await host.open()).toEqual([]);
    });

    test('saves under the suggested name', async () => {
      const bytes = new Uint8Array(randomBytes(1000));
      expect(await host.save({ name: 'record.html', bytes, extensions: ['html'] })).toBe('record.html');
      expect(await harness.saved()).toEqual({ name: 'record.html', bytes });
    });

    test('refuses to save under a name with a folder in it', async () => {
      expect(await codeOf(host.save({ name: '../x.html', bytes: bytesOf('x'), extensions: ['html'] }))).toBe(
        'bad-request',
      );
      expect(await harness.saved()).toBeNull();
    });

    test('keeps a session beside the input, over a restart', async () => {
      const file = await startFile();
      expect(await host.readSession(file.id)).toBeNull();
      const session = JSON.stringify({ remark: 'C7, naïve “quote”, σ' });
      await host.writeSession(file.id, session);
      expect(readFileSync(`${input}.deasil.json`, 'utf8')).toBe(session);
      await restart();
      expect(await host.readSession((await startFile()).id)).toBe(session);
    });

    test('leaves nothing but the session behind', async () => {
      const file = await startFile();
      await Promise.all(['1', '2', '3', '4'].map(json => host.writeSession(file.id, json)));
      expect(await host.readSession(file.id)).toMatch(/^[1-4]$/);
      expect(readdirSync(folder).filter(entry => entry.includes('poses'))).toEqual([
        'poses.sdf',
        'poses.sdf.deasil.json',
      ]);
    });

    test('refuses a session that is not JSON and keeps the old one', async () => {
      const file = await startFile();
      await host.writeSession(file.id, '{"a":1}');
      expect(await codeOf(host.writeSession(file.id, '{"a":'))).toBe('bad-request');
      expect(await host.readSession(file.id)).toBe('{"a":1}');
    });

    test('says where a session could not be written', async () => {
      const file = await startFile();
      mkdirSync(`${input}.deasil.json`);
      await expect(host.writeSession(file.id, '{}')).rejects.toThrow(
        /poses\.sdf\.deasil\.json was not written/,
      );
      expect(await codeOf(host.writeSession(file.id, '{}'))).toBe('not-written');
    });

    test('finds the session of handed-over content again by the content', async () => {
      const file = await host.offer('pasted.smi', bytesOf('C[C@H](N)C(=O)O'));
      await host.writeSession(file.id, '{"pasted":true}');
      await restart();
      const again = await host.offer('another-name.smi', bytesOf('C[C@H](N)C(=O)O'));
      expect(await host.readSession(again.id)).toBe('{"pasted":true}');
      const other = await host.offer('pasted.smi', bytesOf('C[C@@H](N)C(=O)O'));
      expect(await host.readSession(other.id)).toBeNull();
    });

    test('lists recent files, the latest first, without those that are gone', async () => {
      expect((await host.recent()).map(file => file.name)).toEqual(['poses.sdf']);
      const names = ['a.sdf', 'b.sdf', 'c.sdf'];
      for (const name of names) writeFileSync(join(folder, name), name);
      for (const name of names) await harness.openWhileRunning([join(folder, name)]);
      rmSync(join(folder, 'b.sdf'));
      expect((await host.recent()).map(file => file.name)).toEqual(['c.sdf', 'a.sdf', 'poses.sdf']);
      await restart();
      const recent = await host.recent();
      expect(recent.map(file => file.name)).toEqual(['poses.sdf', 'c.sdf', 'a.sdf']);
      expect(text(await host.read(recent[1]!.id, 0, 10))).toBe('c.sdf');
    });

    test('starts with an empty list when the stored one is damaged', async () => {
      writeFileSync(join(machine.configFolder, 'recent.json'), '{"version":1,"files":[7]');
      expect(await host.recent()).toEqual([]);
    });

    test('tells of files opened while running', async () => {
      const events = eventsOf(host);
      const other = join(folder, 'second.pdb');
      writeFileSync(other, 'END\n');
      await new Promise(resolve => setTimeout(resolve, 100));
      await harness.openWhileRunning([other, join(folder, 'absent.pdb')]);
      const event = await events.next(found => found.type === 'opened');
      expect(event).toMatchObject({ type: 'opened', files: [{ name: 'second.pdb', size: 4 }] });
      events.end();
    });

    test('tells when a watched file was rewritten or replaced, with its new size, until watching ends', async () => {
      const { id } = await startFile();
      const events = eventsOf(host);
      await host.watch(id, true);
      await new Promise(resolve => setTimeout(resolve, 100));
      await writeFile(input, 'rewritten\n');
      expect(await events.next(event => event.type === 'changed')).toEqual({
        type: 'changed',
        file: { id, name: 'poses.sdf', size: 10 },
      });
      await writeFile(join(folder, 'new'), 'replaced by renaming\n');
      await rename(join(folder, 'new'), input);
      expect(await events.next(event => event.type === 'changed')).toMatchObject({ file: { id, size: 21 } });
      expect(text(await host.read(id, 0, 100))).toBe('replaced by renaming\n');
      await host.watch(id, false);
      await writeFile(input, 'unseen\n');
      expect(await events.next(event => event.type === 'changed', QUIET)).toBeNull();
      events.end();
    });

    test('reports a file written in pieces once, when it is whole', async () => {
      const { id } = await startFile();
      const events = eventsOf(host);
      await host.watch(id, true);
      await new Promise(resolve => setTimeout(resolve, 100));
      await writeFile(input, '');
      for (let piece = 0; piece < 10; piece++) {
        await appendFile(input, 'piece\n');
        await new Promise(resolve => setTimeout(resolve, 30));
      }
      expect(await events.next(event => event.type === 'changed')).toMatchObject({ file: { size: 60 } });
      expect(await events.next(event => event.type === 'changed', QUIET)).toBeNull();
      events.end();
    });

    test('removes the private copies of handed-over content when it ends', async () => {
      await host.offer('pasted', bytesOf('x'));
      const made = readdirSync(temporary);
      expect(made.length).toBe(1);
      await restart();
      expect(readdirSync(temporary)).toEqual([]);
    });
  });
}
