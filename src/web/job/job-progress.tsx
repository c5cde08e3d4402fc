import { useEffect, useId, useState } from 'preact/hooks';
import type { JobRecord } from '../../contract/index.js';
import { TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import type { Trouble } from '../server/answer.js';
import { cancelJob } from '../server/heddle.js';
import { counted, percent } from '../text/figures.js';
import { duration, secondsBetween } from '../text/moments.js';

interface JobProgressProps {
  readonly job: JobRecord;
  readonly onCancelled: (job: JobRecord) => void;
}

/** How far a job has come, and the way to stop it. */
export function JobProgressView({ job, onCancelled }: JobProgressProps) {
  return (
    <>
      <Section title="Progress">
        <Progress job={job} />
      </Section>
      <Section title="Stop it" note="What was found so far is not kept as a front.">
        <Cancel job={job} onCancelled={onCancelled} />
      </Section>
    </>
  );
}

function Progress({ job }: { readonly job: JobRecord }) {
  const { progress, startedAt } = job;
  const elapsed = useElapsed(startedAt);
  if (startedAt === null || progress === null) {
    return <p role="status">The job is on record and waits for its turn.</p>;
  }
  const { stage, stageIndex, stageCount, done, total, fraction } = progress;
  return (
    <div class="progress">
      <progress max={1} value={fraction} aria-label="Progress of the job" />
      <p class="progress-words">
        <strong>{percent(fraction)}</strong>
        <span role="status">
          stage {stageIndex + 1} of {stageCount}: {stage}
        </span>
        <span>
          {done} of {counted(total, 'task')}
        </span>
        <span>{elapsed}</span>
      </p>
    </div>
  );
}

/** Time since the start, in words, kept up by the second. */
function useElapsed(startedAt: string | null): string {
  const [, tick] = useState(0);
  useEffect(() => {
    const timer = setInterval(() => tick((before) => before + 1), 1000);
    return () => clearInterval(timer);
  }, []);
  return startedAt === null ? '' : duration(Math.floor(secondsBetween(startedAt, null)));
}

function Cancel({ job, onCancelled }: JobProgressProps) {
  const id = useId();
  const [isOpen, setOpen] = useState(false);
  const [isSending, setSending] = useState(false);
  const [trouble, setTrouble] = useState<Trouble | null>(null);
  const [person, setPerson] = useState('');
  const [reason, setReason] = useState('');

  const cancel = async (): Promise<void> => {
    setSending(true);
    setTrouble(null);
    const answer = await cancelJob(job.id, {
      ...(person.trim() === '' ? {} : { person: person.trim() }),
      ...(reason.trim() === '' ? {} : { reason: reason.trim() }),
    });
    setSending(false);
    if (answer.ok) onCancelled(answer.value);
    else setTrouble(answer.trouble);
  };

  if (!isOpen) {
    return (
      <button type="button" class="plain" onClick={() => setOpen(true)}>
        Cancel this job ...
      </button>
    );
  }
  return (
    <form
      class="signing"
      onSubmit={(event) => {
        event.preventDefault();
        void cancel();
      }}
    >
      <div class="field">
        <label for={`${id}-person`}>Your name (optional)</label>
        <input
          id={`${id}-person`}
          type="text"
          maxLength={120}
          autocomplete="name"
          value={person}
          onInput={(event) => setPerson(event.currentTarget.value)}
        />
      </div>
      <div class="field">
        <label for={`${id}-reason`}>Reason (optional)</label>
        <input
          id={`${id}-reason`}
          type="text"
          maxLength={2000}
          value={reason}
          onInput={(event) => setReason(event.currentTarget.value)}
        />
      </div>
      <p class="buttons">
        <button type="submit" class="action action-bad" disabled={isSending}>
          {isSending ? 'Cancelling ...' : 'Cancel the job'}
        </button>
        <button type="button" class="plain" onClick={() => setOpen(false)}>
          Let it run
        </button>
      </p>
      {trouble !== null && <TroubleNotice trouble={trouble} />}
    </form>
  );
}
