/** Finds the published check data that lies beside the checkout, in `../shared/data`. */
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/** Why a test that needs the shared data was skipped. */
export const SHARED_DATA_ABSENT = 'the published check data (../shared/data) is not beside this checkout';

/** Path of a file or folder of the shared data, or null where it is absent. */
export function sharedData(name: string): string | null {
  const path = fileURLToPath(new URL(`../../shared/data/${name}`, import.meta.url));
  return existsSync(path) ? path : null;
}
