import { useEffect, useState } from 'preact/hooks';

/** What the page shows, as its address says after `#`. */
export type Route =
  | { readonly view: 'jobs' }
  | { readonly view: 'hand-in' }
  | { readonly view: 'job'; readonly job: string; readonly alternative: string | null }
  | { readonly view: 'sheet'; readonly job: string; readonly change: string }
  | { readonly view: 'unknown'; readonly address: string };

/** Reads an address such as `#/jobs/J0123456789ab/A03`. */
function readRoute(hash: string): Route {
  const parts = hash
    .replace(/^#?\/?/, '')
    .split('/')
    .filter((part) => part !== '')
    .map(decoded);
  const [first, second, third, fourth] = parts;
  if (first === undefined) return { view: 'jobs' };
  if (first === 'hand-in' && parts.length === 1) return { view: 'hand-in' };
  if (first === 'jobs' && second === undefined) return { view: 'jobs' };
  if (first === 'jobs' && second !== undefined) {
    if (third === 'changes' && fourth !== undefined && parts.length === 4) {
      return { view: 'sheet', job: second, change: fourth };
    }
    if (parts.length <= 3 && third !== 'changes') {
      return { view: 'job', job: second, alternative: third ?? null };
    }
  }
  return { view: 'unknown', address: hash };
}

const encoded = (...parts: readonly string[]): string =>
  `#/${parts.map(encodeURIComponent).join('/')}`;

/** Addresses within the page. */
export const links = {
  jobs: '#/',
  handIn: '#/hand-in',
  job: (job: string): string => encoded('jobs', job),
  alternative: (job: string, alternative: string): string => encoded('jobs', job, alternative),
  sheet: (job: string, change: string): string => encoded('jobs', job, 'changes', change),
};

/** Goes on to another view, as a link would. */
export function goTo(address: string): void {
  location.hash = address;
}

/** Takes another address for the view at hand, so that Back leads out of it and not through it. */
export function replaceAddress(address: string): void {
  history.replaceState(null, '', address);
  dispatchEvent(new HashChangeEvent('hashchange'));
}

export function useRoute(): Route {
  const [hash, setHash] = useState(location.hash);
  useEffect(() => {
    const follow = (): void => setHash(location.hash);
    addEventListener('hashchange', follow);
    return () => removeEventListener('hashchange', follow);
  }, []);
  return readRoute(hash);
}

function decoded(part: string): string {
  try {
    return decodeURIComponent(part);
  } catch {
    return part;
  }
}
