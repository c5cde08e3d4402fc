import { useEffect, useRef, useState } from 'preact/hooks';
import type { Act, ChangeRecord, JobRecord } from '../../contract/index.js';
import type { FrontPoint } from '../front/front-points.js';
import { Moment } from '../parts/moment.js';
import { TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import { StateMark } from '../parts/state-mark.js';
import { links } from '../route.js';
import type { Trouble } from '../server/answer.js';
import { addresses, decideChange, fetchChanges, proposeChange } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { cautions } from '../text/words.js';
import { SigningForm } from './signing-form.js';

interface ChangesProps {
  readonly job: JobRecord;
  /** The tuning set chosen: an alternative and settings that were kept can be proposed. */
  readonly chosen: FrontPoint | null;
}

/** What people decided about this job's alternatives, and the way to decide. */
export function ChangesSection({ job, chosen }: ChangesProps) {
  const mayPropose = chosen !== null && (chosen.kind === 'alternative' || chosen.kind === 'own');
  const alternative = mayPropose && chosen.scored.stable ? chosen.key : null;
  const { value, trouble, reload } = useResource(`changes ${job.id}`, (signal) =>
    fetchChanges(job.id, signal),
  );
  const changes = value?.changes ?? [];
  // What was signed here last: whoever signed is led to it, wherever it now stands.
  const [signed, setSigned] = useState<string | null>(null);

  const propose = async (act: Act): Promise<Trouble | null> => {
    const answer = await proposeChange(job.id, { alternative: alternative ?? '', ...act });
    reload();
    if (!answer.ok) return answer.trouble;
    setSigned(answer.value.id);
    return null;
  };

  if (alternative === null && changes.length === 0 && trouble === null) return null;
  return (
    <Section
      title="Decision"
      note={
        <ul class="cautions">
          {cautions.map((words) => (
            <li key={words}>{words}</li>
          ))}
        </ul>
      }
    >
      {trouble !== null && <TroubleNotice trouble={trouble} onRetry={reload} />}
      {changes.length > 0 && (
        <ol class="changes" aria-label="Changes proposed for this unit, the latest first">
          {changes.map((change) => (
            <Change
              key={change.id}
              change={change}
              isSigned={change.id === signed}
              onDecided={() => {
                setSigned(change.id);
                reload();
              }}
            />
          ))}
        </ol>
      )}
      {alternative !== null && (
        <div class="propose">
          <h3>Propose {alternative}</h3>
          <p>
            A proposal changes nothing in the plant. Another person approves or rejects it; once
            approved, its change sheet can be printed.
          </p>
          {chosen?.isAccepted === false && (
            <p class="broken">
              {alternative} breaks limits on some of its models: as an alternative of the search it
              would not stand.
            </p>
          )}
          <SigningForm
            key={alternative}
            label={`Propose ${alternative}`}
            acts={[{ words: `Propose ${alternative}`, perform: propose }]}
          />
        </div>
      )}
    </Section>
  );
}

interface ChangeProps {
  readonly change: ChangeRecord;
  /** It was signed here last. */
  readonly isSigned: boolean;
  readonly onDecided: () => void;
}

/** One change: how it stands, who signed, and what is to be done next. */
function Change({ change, isSigned, onDecided }: ChangeProps) {
  const head = useRef<HTMLHeadingElement>(null);
  const { state } = change;
  useEffect(() => {
    if (isSigned) head.current?.focus();
  }, [isSigned, state]);
  const decide =
    (decision: 'approve' | 'reject') =>
    async (act: Act): Promise<Trouble | null> => {
      const answer = await decideChange(change.id, decision, act);
      onDecided();
      return answer.ok ? null : answer.trouble;
    };
  return (
    <li class="change">
      <h3 ref={head} tabIndex={-1}>
        {change.alternative} <StateMark state={change.state} />
        <span class="under">{change.id}</span>
      </h3>
      <dl class="signatures">
        <Signature words="Proposed" by={change.proposed} />
        {change.decided !== null && (
          <Signature
            words={change.state === 'approved' ? 'Approved' : 'Rejected'}
            by={change.decided}
          />
        )}
      </dl>
      {change.state === 'proposed' && (
        <SigningForm
          label={`Decide on ${change.alternative}, ${change.id}`}
          acts={[
            { words: 'Approve', perform: decide('approve') },
            { words: 'Reject', isSerious: true, perform: decide('reject') },
          ]}
          remarkOn={(person) =>
            person !== '' && person === change.proposed.person
              ? 'This is who proposed it. Approval is meant for a second person.'
              : null
          }
        >
          <p>Decide on it, as a second person:</p>
        </SigningForm>
      )}
      {change.state === 'approved' && (
        <p class="buttons">
          <a class="action" href={links.sheet(change.job, change.id)}>
            Change sheet
          </a>
          <a href={addresses.sheet(change.id, 'csv')} download={`${change.id}.csv`}>
            as CSV
          </a>
          <a href={addresses.sheet(change.id, 'json')} download={`${change.id}.json`}>
            as JSON
          </a>
        </p>
      )}
    </li>
  );
}

function Signature({
  words,
  by,
}: {
  readonly words: string;
  readonly by: ChangeRecord['proposed'];
}) {
  return (
    <div>
      <dt>{words}</dt>
      <dd>
        {by.person}, <Moment at={by.at} />
        <q>{by.reason}</q>
      </dd>
    </div>
  );
}
