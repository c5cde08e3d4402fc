import { useCallback, useEffect, useRef, useState } from 'preact/hooks';
import type { EvaluationDocument } from '../../contract/index.js';
import type { Answer, Trouble } from '../server/answer.js';
import { trySettings } from '../server/heddle.js';

/** How long nothing is typed before it is scored, ms. */
const pause = 200;

/** What the server makes of settings that are being tried. */
export interface Trial {
  /** The latest score; it may be of what stood there before. */
  readonly scored: EvaluationDocument | null;
  /** Why there is none of what stands there now. */
  readonly trouble: Trouble | null;
  /** Score and trouble are of what stands there now. */
  readonly isCurrent: boolean;
  readonly retry: () => void;
}

interface Held {
  readonly of: string | null;
  readonly scored: EvaluationDocument | null;
  readonly trouble: Trouble | null;
}

const nothing: Held = { of: null, scored: null, trouble: null };

/**
 * Scores settings a moment after they stop changing.
 *
 *   idle      nothing asked; settings that changed wait for the pause
 *   asking    one request under way, never broken off: the server would lose what it has at hand for
 *             this job; settings that change meanwhile are asked for as soon as it is answered
 * @param settings  by loop, as JSON; null while there is nothing that could be scored
 */
export function useTrial(job: string, settings: string | null): Trial {
  const [held, hold] = useState<Held>(nothing);
  const [round, setRound] = useState(0);
  const isAsking = useRef(false);
  const wanted = useRef(settings);
  wanted.current = settings;
  const isShown = useRef(true);

  useEffect(() => {
    isShown.current = true;
    return () => {
      isShown.current = false;
    };
  }, []);

  const askOnce = useCallback(
    async (asked: string): Promise<void> => {
      isAsking.current = true;
      const answer: Answer<EvaluationDocument> = await trySettings(job, asked);
      isAsking.current = false;
      if (!isShown.current) return;
      hold((before) =>
        answer.ok
          ? { of: asked, scored: answer.value, trouble: null }
          : { of: asked, scored: before.scored, trouble: answer.trouble },
      );
      if (wanted.current !== null && wanted.current !== asked) void askOnce(wanted.current);
    },
    [job],
  );

  useEffect(() => {
    if (settings === null) return undefined;
    const timer = setTimeout(() => {
      if (!isAsking.current) void askOnce(settings);
    }, pause);
    return () => clearTimeout(timer);
  }, [settings, askOnce, round]);

  const isCurrent = held.of === settings && settings !== null;
  return {
    scored: held.scored,
    trouble: isCurrent ? held.trouble : null,
    isCurrent,
    retry: () => setRound((before) => before + 1),
  };
}
