/** The structure drawing beside the model. */
import type { ReactElement } from 'react';

export function DrawingPanel(): ReactElement | null {
  return null;
}
