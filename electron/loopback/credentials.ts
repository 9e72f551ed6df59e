/** Who may talk to the loopback host: one-time tokens for the address, a session cookie from then on. */
import { createHash, randomBytes, timingSafeEqual } from 'node:crypto';

const BYTES = 32;

/** Compares in time that does not depend on where two secrets differ. */
function equal(one: string, other: string): boolean {
  const digest = (text: string): Buffer => createHash('sha256').update(text).digest();
  return timingSafeEqual(digest(one), digest(other));
}

export class Credentials {
  readonly #session = randomBytes(BYTES).toString('base64url');
  readonly #tokens = new Set<string>();

  /** A new token, good for one exchange. */
  issue(): string {
    const token = randomBytes(BYTES).toString('base64url');
    this.#tokens.add(token);
    return token;
  }

  /** Takes a token in exchange for the session's secret; null when it was never issued or is spent. */
  exchange(token: string): string | null {
    for (const issued of this.#tokens) {
      if (equal(issued, token)) {
        this.#tokens.delete(issued);
        return this.#session;
      }
    }
    return null;
  }

  /** Whether a cookie header holds the session's secret under a name. */
  admits(cookieHeader: string | undefined, name: string): boolean {
    for (const part of (cookieHeader ?? '').split(';')) {
      const at = part.indexOf('=');
      if (at > 0 && part.slice(0, at).trim() === name && equal(part.slice(at + 1).trim(), this.#session))
        return true;
    }
    return false;
  }
}
