/** The security headers of everything the window is served, in the Electron shell and on loopback alike. */

/** The page runs its own scripts only: nothing inline, nothing built from text, nothing from elsewhere. */
const PAGE_POLICY = [
  "default-src 'none'",
  "script-src 'self'",
  "style-src 'self'",
  "img-src 'self' data: blob:",
  "font-src 'self'",
  "connect-src 'self'",
  "worker-src 'self'",
  "manifest-src 'self'",
  "base-uri 'none'",
  "form-action 'none'",
  "frame-ancestors 'none'",
].join('; ');

/** A worker answers for itself: the WebAssembly module there builds functions from text, and nothing but the worker may. */
const WORKER_POLICY = [
  "default-src 'none'",
  "script-src 'self' 'unsafe-eval' 'wasm-unsafe-eval'",
  "connect-src 'self'",
  "worker-src 'self'",
].join('; ');

/** Features a page could ask for; all but the clipboard are refused. */
const REFUSED_FEATURES = [
  'accelerometer',
  'camera',
  'display-capture',
  'geolocation',
  'gyroscope',
  'hid',
  'idle-detection',
  'local-fonts',
  'magnetometer',
  'microphone',
  'midi',
  'payment',
  'publickey-credentials-get',
  'screen-wake-lock',
  'serial',
  'usb',
  'xr-spatial-tracking',
];

const PERMISSIONS = [
  ...REFUSED_FEATURES.map(feature => `${feature}=()`),
  'clipboard-read=(self)',
  'clipboard-write=(self)',
].join(', ');

/** Headers of every response. */
const COMMON: Readonly<Record<string, string>> = {
  'X-Content-Type-Options': 'nosniff',
  'X-Frame-Options': 'DENY',
  'Referrer-Policy': 'no-referrer',
  'Cross-Origin-Opener-Policy': 'same-origin',
  'Cross-Origin-Embedder-Policy': 'require-corp',
  'Cross-Origin-Resource-Policy': 'same-origin',
  'Permissions-Policy': PERMISSIONS,
};

/** Headers for a file of the window; a script that runs as a worker has "worker" in its name. */
export function headersFor(path: string): Record<string, string> {
  return { ...COMMON, 'Content-Security-Policy': isWorker(path) ? WORKER_POLICY : PAGE_POLICY };
}

function isWorker(path: string): boolean {
  return /(^|\/)[^/]*worker[^/]*\.js$/i.test(path);
}
