/** How electron-builder packs the shell for Linux, macOS and Windows. */
import type { Configuration } from 'electron-builder';
import { ASSOCIATIONS } from './electron/associations.ts';

const configuration: Configuration = {
  appId: 'org.deasil.Deasil',
  productName: 'Deasil',
  copyright: 'MIT licence',
  directories: { output: 'dist/package', buildResources: 'assets/icons' },
  // Everything the program needs is in its bundles; no package is shipped beside them.
  files: [
    'package.json',
    'LICENSE',
    'dist/electron/**',
    'dist/window/**',
    'dist/licences.json',
    'assets/demo/**',
    'assets/icons/icon.png',
    // The loopback host is for checkouts without the runtime.
    '!dist/electron/start.js',
    '!node_modules/**',
  ],
  asar: true,
  npmRebuild: false,
  publish: null,
  icon: 'assets/icons/icon.png',
  fileAssociations: ASSOCIATIONS.map(kind => ({
    ext: [...kind.extensions],
    name: kind.name,
    description: kind.name,
    mimeType: kind.mimeType,
    role: 'Editor' as const,
  })),
  electronFuses: {
    runAsNode: false,
    enableCookieEncryption: true,
    enableNodeOptionsEnvironmentVariable: false,
    enableNodeCliInspectArguments: false,
    enableEmbeddedAsarIntegrityValidation: true,
    onlyLoadAppFromAsar: true,
    loadBrowserProcessSpecificV8Snapshot: false,
    grantFileProtocolExtraPrivileges: false,
  },
  linux: {
    target: ['AppImage', 'deb'],
    category: 'Science',
    synopsis: 'Checks the handedness of three-dimensional molecular models',
  },
  mac: {
    target: ['dmg'],
    category: 'public.app-category.productivity',
    hardenedRuntime: true,
  },
  win: { target: ['nsis'] },
  nsis: { oneClick: false, perMachine: false, allowToChangeInstallationDirectory: true },
};

export default configuration;
