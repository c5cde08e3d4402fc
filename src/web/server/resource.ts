import { useCallback, useEffect, useRef, useState } from 'preact/hooks';
import type { Answer, Trouble } from './answer.js';

/** Something fetched: its latest value, and what is in the way where the latest try failed. */
export interface Resource<Value> {
  /** Undefined until the first answer for this key. */
  readonly value: Value | undefined;
  readonly trouble: Trouble | null;
  readonly isLoading: boolean;
  readonly reload: () => void;
}

interface Held<Value> {
  readonly key: string | null;
  readonly value: Value | undefined;
  readonly trouble: Trouble | null;
  readonly isLoading: boolean;
}

/**
 * What `load` answers for the key; fetched again when the key changes or `reload` is called, and the
 * value kept meanwhile only while the key stays the same.
 * @param key  null to fetch nothing yet
 */
export function useResource<Value>(
  key: string | null,
  load: (signal: AbortSignal) => Promise<Answer<Value>>,
): Resource<Value> {
  const [held, hold] = useState<Held<Value>>(() => waiting(key));
  const [round, setRound] = useState(0);
  const latest = useRef(load);
  latest.current = load;
  useEffect(() => {
    if (key === null) return undefined;
    const abort = new AbortController();
    hold((before) => (before.key === key ? { ...before, isLoading: true } : waiting(key)));
    latest.current(abort.signal).then(
      (answer) => hold((before) => settled(before, key, answer)),
      () => undefined,
    );
    return () => abort.abort();
  }, [key, round]);
  const reload = useCallback(() => setRound((before) => before + 1), []);
  const current = held.key === key ? held : waiting<Value>(key);
  return { ...current, reload };
}

const waiting = <Value>(key: string | null): Held<Value> => ({
  key,
  value: undefined,
  trouble: null,
  isLoading: key !== null,
});

function settled<Value>(before: Held<Value>, key: string, answer: Answer<Value>): Held<Value> {
  if (answer.ok) return { key, value: answer.value, trouble: null, isLoading: false };
  const value = before.key === key ? before.value : undefined;
  return { key, value, trouble: answer.trouble, isLoading: false };
}
