import { useEffect, useState } from 'preact/hooks';

/** What of a job is looked at. */
export interface Look {
  /** The tuning set that is chosen. */
  readonly chosen: string | null;
  /** Those set beside it. */
  readonly beside: readonly string[];
  /** The upset whose responses are shown: its kind and its tag, `load TC-101`. */
  readonly upset: string | null;
}

/** Beside today's settings and the one chosen, more would not be told apart. */
export const mostBeside = 2;

/** What the page shows, as its address says after `#`. */
export type Route =
  | { readonly view: 'jobs' }
  | { readonly view: 'hand-in' }
  | { readonly view: 'job'; readonly job: string; readonly look: Look }
  | { readonly view: 'sheet'; readonly job: string; readonly change: string }
  | { readonly view: 'unknown'; readonly address: string };

/** Reads an address such as `#/jobs/J0123456789ab/A03?beside=A07&upset=load+TC-101`. */
function readRoute(hash: string): Route {
  const [path = '', query = ''] = hash.split('?', 2);
  const parts = path
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
      return { view: 'job', job: second, look: readLook(third ?? null, query) };
    }
  }
  return { view: 'unknown', address: hash };
}

function readLook(chosen: string | null, query: string): Look {
  const asked = new URLSearchParams(query);
  const beside = new Set((asked.get('beside') ?? '').split(',').filter((id) => id !== ''));
  if (chosen !== null) beside.delete(chosen);
  return { chosen, beside: [...beside].slice(0, mostBeside), upset: asked.get('upset') };
}

const encoded = (...parts: readonly string[]): string =>
  `#/${parts.map(encodeURIComponent).join('/')}`;

/** Addresses within the page. */
export const links = {
  jobs: '#/',
  handIn: '#/hand-in',
  job: (job: string): string => encoded('jobs', job),
  look: (job: string, { chosen, beside, upset }: Look): string => {
    const asked = new URLSearchParams();
    if (beside.length > 0) asked.set('beside', beside.join(','));
    if (upset !== null) asked.set('upset', upset);
    const place = chosen === null ? encoded('jobs', job) : encoded('jobs', job, chosen);
    return asked.size === 0 ? place : `${place}?${asked}`;
  },
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
