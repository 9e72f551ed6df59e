/** The arguments of `npm start` and of the shell. */
import { describe, expect, test } from 'vitest';
import { filesOf, parseArguments } from '../../../electron/arguments.ts';

describe('the arguments of npm start', () => {
  test('paths are meant from where the person is', () => {
    expect(parseArguments(['a.sdf', '/abs/b.cif', './c/d.mol'], '/home/x').files).toEqual([
      '/home/x/a.sdf',
      '/abs/b.cif',
      '/home/x/c/d.mol',
    ]);
  });

  test('options are read, and -- ends them', () => {
    expect(parseArguments(['--browser', '--no-open', '--port', '8080', '--', '--odd.sdf'], '/h')).toEqual({
      files: ['/h/--odd.sdf'],
      browser: true,
      quiet: true,
      help: false,
      port: 8080,
    });
  });

  test.each([
    [['--nonsense'], /no option --nonsense/],
    [['--port'], /--port wants a number/],
    [['--port', 'x'], /not "x"/],
    [['--port', '70000'], /65535/],
  ])('%j is refused with the reason', (args, reason) => {
    expect(() => parseArguments(args, '/h')).toThrow(reason);
  });
});

test('the files of a shell start are what is no switch and not the program', () => {
  expect(filesOf(['electron', '/program', '--type=x', 'a.sdf', '', '/b.sdf'], false, '/h')).toEqual([
    '/h/a.sdf',
    '/b.sdf',
  ]);
  expect(filesOf(['/opt/deasil', '--no-sandbox', 'a.sdf'], true, '/h')).toEqual(['/h/a.sdf']);
});
