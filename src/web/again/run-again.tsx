import { useId, useRef, useState } from 'preact/hooks';
import { type JobInput, readJob } from '../../contract/index.js';
import { FaultList } from '../jobs/fault-list.js';
import { submissionKey } from '../jobs/submission-key.js';
import { Loading, TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import { goTo, links } from '../route.js';
import type { Trouble } from '../server/answer.js';
import { fetchWritten, handIn } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { viewUnit } from '../text/unit-view.js';
import { type Changes, changedJob, changesOf, efforts } from './changed-job.js';
import { LimitFields } from './limit-fields.js';

/** Makes another job of one that is done, with other limits or another search. */
export function RunAgain({ job }: { readonly job: string }) {
  const [isOpen, setOpen] = useState(false);
  const written = useResource(isOpen ? `written ${job}` : null, (signal) =>
    fetchWritten(job, signal),
  );
  return (
    <Section
      title="Run again"
      note={<p>With other limits: a new job, which remembers that it was made from this one.</p>}
    >
      {!isOpen && (
        <button type="button" class="plain" onClick={() => setOpen(true)}>
          Run again with changes ...
        </button>
      )}
      {written.trouble !== null && (
        <TroubleNotice trouble={written.trouble} onRetry={written.reload} />
      )}
      {isOpen && written.value === undefined && written.isLoading && <Loading what="the job" />}
      {isOpen && written.value !== undefined && (
        <AgainForm job={job} written={written.value} onClose={() => setOpen(false)} />
      )}
    </Section>
  );
}

interface AgainFormProps {
  readonly job: string;
  readonly written: JobInput;
  readonly onClose: () => void;
}

function AgainForm({ job, written, onClose }: AgainFormProps) {
  const id = useId();
  const [changes, setChanges] = useState<Changes>(() => changesOf(written));
  const [isSending, setSending] = useState(false);
  const [trouble, setTrouble] = useState<Trouble | null>(null);
  const attempt = useRef<{ readonly of: string; readonly key: string } | null>(null);
  const read = readJob(JSON.stringify(written));
  if (!read.ok) return null;
  const unit = viewUnit(read.job);
  const change = (part: Partial<Changes>): void => setChanges({ ...changes, ...part });
  const faults = new Map(
    (trouble?.faults ?? []).map(({ path, problem, allowed }) => [
      path,
      `${problem}; allowed: ${allowed}`,
    ]),
  );

  const submit = async (): Promise<void> => {
    if (isSending) return;
    const text = JSON.stringify(changedJob(written, changes));
    if (attempt.current?.of !== text) attempt.current = { of: text, key: submissionKey() };
    setSending(true);
    setTrouble(null);
    const answer = await handIn(text, attempt.current.key, job);
    setSending(false);
    if (answer.ok) goTo(links.job(answer.value.job.id));
    else setTrouble(answer.trouble);
  };

  return (
    <form
      class="again"
      aria-label="Run again"
      noValidate
      onSubmit={(event) => {
        event.preventDefault();
        void submit();
      }}
    >
      <LimitFields
        unit={unit}
        limits={changes.limits}
        faults={faults}
        onLimits={(limits) => change({ limits })}
      />
      <div class="choosers">
        <div class="field">
          <label for={`${id}-alternatives`}>Alternatives, 2 to 100</label>
          <input
            id={`${id}-alternatives`}
            type="text"
            inputMode="numeric"
            value={changes.alternatives}
            aria-invalid={faults.has('search.alternatives')}
            onInput={({ currentTarget: { value } }) => change({ alternatives: value })}
          />
        </div>
        <div class="field">
          <label for={`${id}-effort`}>Effort</label>
          <select
            id={`${id}-effort`}
            value={changes.effort}
            onChange={({ currentTarget: { value } }) => {
              const effort = efforts.find((one) => one === value);
              if (effort !== undefined) change({ effort });
            }}
          >
            {efforts.map((effort) => (
              <option key={effort} value={effort}>
                {effort}
              </option>
            ))}
          </select>
        </div>
        <div class="field">
          <label for={`${id}-seed`}>Seed</label>
          <input
            id={`${id}-seed`}
            type="text"
            inputMode="numeric"
            value={changes.seed}
            aria-invalid={faults.has('search.seed')}
            onInput={({ currentTarget: { value } }) => change({ seed: value })}
          />
        </div>
      </div>
      <p class="buttons">
        <button type="submit" class="action" disabled={isSending}>
          {isSending ? 'Handing in ...' : 'Hand in the new job'}
        </button>
        <button type="button" class="plain" onClick={onClose}>
          Close
        </button>
      </p>
      {trouble !== null && trouble.faults.length === 0 && <TroubleNotice trouble={trouble} />}
      {trouble !== null && trouble.faults.length > 0 && <FaultList trouble={trouble} />}
    </form>
  );
}
