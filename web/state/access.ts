import { signal } from '@preact/signals';

const KEY = 'ratespan-token';

function storedToken(): string {
  try {
    return sessionStorage.getItem(KEY) ?? '';
  } catch {
    return '';
  }
}

/** Sent with every request; empty on a server that asks for none. Kept as long as the tab is open, never in an address. */
export const accessToken = signal(storedToken());

/** The server has refused a request for want of a token. */
export const isTokenWanted = signal(false);

export function giveToken(token: string): void {
  accessToken.value = token;
  isTokenWanted.value = false;
  try {
    sessionStorage.setItem(KEY, token);
  } catch {
    // Not kept beyond this page then.
  }
}
