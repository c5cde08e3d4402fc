import { useRef, useState } from 'preact/hooks';
import type { AcceptedJob } from '../../contract/index.js';
import { TroubleNotice } from '../parts/notices.js';
import { goTo, links } from '../route.js';
import type { Trouble } from '../server/answer.js';
import { handIn } from '../server/heddle.js';
import { counted, figure } from '../text/figures.js';
import { DocumentPath } from './document-path.js';
import { FaultList } from './fault-list.js';
import { submissionKey } from './submission-key.js';

/** What is to be handed in: a file as it is, or a text. */
type Chosen = File | string;

/** Takes a job document from a file, by dropping it, or as text, and shows what is wrong with it. */
export function HandIn() {
  const [file, setFile] = useState<File | null>(null);
  const [text, setText] = useState('');
  const [isDraggedOver, setDraggedOver] = useState(false);
  const [isSending, setSending] = useState(false);
  const [trouble, setTrouble] = useState<Trouble | null>(null);
  const [accepted, setAccepted] = useState<AcceptedJob | null>(null);
  const outcome = useRef<HTMLDivElement>(null);
  // One key for each document, so that a second attempt after a lost answer makes no second job.
  const attempt = useRef<{ readonly of: Chosen; readonly key: string } | null>(null);

  const chosen: Chosen | null = file ?? (text.trim() === '' ? null : text);

  const choose = (next: File | null): void => {
    setFile(next);
    setTrouble(null);
  };

  const submit = async (): Promise<void> => {
    if (chosen === null || isSending) return;
    if (attempt.current?.of !== chosen) attempt.current = { of: chosen, key: submissionKey() };
    setSending(true);
    setTrouble(null);
    const answer = await handIn(chosen, attempt.current.key);
    setSending(false);
    if (!answer.ok) {
      setTrouble(answer.trouble);
      outcome.current?.focus();
    } else if (answer.value.warnings.length === 0) {
      goTo(links.job(answer.value.job.id));
    } else {
      setAccepted(answer.value);
    }
  };

  if (accepted !== null) return <Accepted accepted={accepted} />;
  return (
    <>
      <header class="page-head">
        <h1>Hand in a job</h1>
        <p class="lead">
          A job document is JSON of the format <code>heddle-job/1</code>. It is kept as it is and
          never changed.
        </p>
      </header>
      <form
        class="hand-in"
        onSubmit={(event) => {
          event.preventDefault();
          void submit();
        }}
      >
        {/* biome-ignore lint/a11y/noStaticElementInteractions: dropping is a shortcut to the file chooser in it */}
        <div
          class={isDraggedOver ? 'drop drop-over' : 'drop'}
          onDragOver={(event) => {
            event.preventDefault();
            setDraggedOver(true);
          }}
          onDragLeave={() => setDraggedOver(false)}
          onDrop={(event) => {
            event.preventDefault();
            setDraggedOver(false);
            choose(event.dataTransfer?.files[0] ?? null);
          }}
        >
          <label for="job-file">Job document, a file</label>
          <input
            id="job-file"
            type="file"
            accept=".json,application/json"
            aria-describedby="job-file-note"
            onChange={(event) => choose(event.currentTarget.files?.[0] ?? null)}
          />
          <p id="job-file-note" class="quiet">
            {file === null
              ? 'Choose it, or drop it here.'
              : `${file.name}, ${figure(file.size / 1024)} kB`}
          </p>
        </div>
        <div class="field">
          <label for="job-text">Or the document as text</label>
          <textarea
            id="job-text"
            rows={10}
            spellcheck={false}
            value={text}
            disabled={file !== null}
            aria-describedby="job-text-note"
            onInput={(event) => {
              setText(event.currentTarget.value);
              setTrouble(null);
            }}
          />
          <p id="job-text-note" class="quiet">
            {file === null ? 'Paste the whole document.' : 'A file is chosen; it is what counts.'}
          </p>
        </div>
        <p class="buttons">
          <button type="submit" class="action" disabled={chosen === null || isSending}>
            {isSending ? 'Handing in ...' : 'Hand in'}
          </button>
          {file !== null && (
            <button
              type="button"
              class="plain"
              onClick={(event) => {
                event.currentTarget.form?.reset();
                choose(null);
              }}
            >
              Put the file back
            </button>
          )}
        </p>
      </form>
      <div ref={outcome} tabIndex={-1}>
        {trouble !== null && trouble.faults.length === 0 && <TroubleNotice trouble={trouble} />}
        {trouble !== null && trouble.faults.length > 0 && <FaultList trouble={trouble} />}
      </div>
    </>
  );
}

/** A job that was accepted although something in it is seldom meant. */
function Accepted({ accepted: { job, warnings } }: { readonly accepted: AcceptedJob }) {
  return (
    <>
      <header class="page-head">
        <h1>Accepted, with {counted(warnings.length, 'warning')}</h1>
        <p class="lead">
          {job.unitName}, {counted(job.loops, 'loop')}: the job is on record as {job.id}. What
          follows is allowed and seldom meant.
        </p>
      </header>
      <table class="faults">
        <thead>
          <tr>
            <th scope="col">Place</th>
            <th scope="col">Found</th>
            <th scope="col">What to know</th>
          </tr>
        </thead>
        <tbody>
          {warnings.map(({ path, value, problem }) => (
            <tr key={`${path} ${problem}`}>
              <th scope="row">
                <DocumentPath path={path} />
              </th>
              <td>
                <code>{value}</code>
              </td>
              <td>{problem}</td>
            </tr>
          ))}
        </tbody>
      </table>
      <p>
        <a class="action" href={links.job(job.id)}>
          Follow the job
        </a>
      </p>
    </>
  );
}
