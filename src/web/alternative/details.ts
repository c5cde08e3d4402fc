import { useRef } from 'preact/hooks';
import type { AlternativeDetail } from '../../contract/index.js';
import { type Answer, answered } from '../server/answer.js';
import { fetchAlternative } from '../server/heddle.js';
import { type Resource, useResource } from '../server/resource.js';

/** The documents of several tuning sets of a job, in their order; none is fetched twice. */
export function useDetails(
  job: string,
  keys: readonly string[],
): Resource<readonly AlternativeDetail[]> {
  const kept = useRef(new Map<string, AlternativeDetail>());
  const load = async (signal: AbortSignal): Promise<Answer<readonly AlternativeDetail[]>> => {
    const answers = await Promise.all(
      keys.map((key) => {
        const held = kept.current.get(`${job} ${key}`);
        return held === undefined ? fetchAlternative(job, key, signal) : answered(held);
      }),
    );
    const details: AlternativeDetail[] = [];
    for (const answer of answers) {
      if (!answer.ok) return answer;
      kept.current.set(`${job} ${answer.value.id}`, answer.value);
      details.push(answer.value);
    }
    return answered(details);
  };
  return useResource(`alternatives ${job} ${keys.join(' ')}`, load);
}
