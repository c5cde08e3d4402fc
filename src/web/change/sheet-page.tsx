import type { SheetDocument } from '../../contract/index.js';
import { Moment } from '../parts/moment.js';
import { Loading, TroubleNotice } from '../parts/notices.js';
import { StateMark } from '../parts/state-mark.js';
import { links } from '../route.js';
import { addresses, fetchSheet } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { atLeastPercent, counted, figure } from '../text/figures.js';
import { referenceInWords } from '../text/words.js';
import { ExpectationTable } from './expectation-table.js';
import { SheetLoop } from './sheet-loop.js';

interface SheetPageProps {
  readonly job: string;
  readonly change: string;
}

/** The change sheet: what is taken to the control room, on paper too. */
export function SheetPage({ job, change }: SheetPageProps) {
  const { value, trouble, reload } = useResource(`sheet ${change}`, (signal) =>
    fetchSheet(change, signal),
  );
  return (
    <>
      <nav aria-label="Place" class="not-printed">
        <a href={links.jobs}>Jobs</a>
        {' / '}
        <a
          href={
            value === undefined
              ? links.job(job)
              : links.look(value.change.job, {
                  chosen: value.change.alternative,
                  beside: [],
                  upset: null,
                })
          }
        >
          {value === undefined ? 'Job' : `${value.unitName}, ${value.change.alternative}`}
        </a>
      </nav>
      {value === undefined && <h1>Change sheet</h1>}
      {trouble !== null && <TroubleNotice trouble={trouble} onRetry={reload} />}
      {value === undefined && trouble === null && <Loading what="the change sheet" />}
      {value !== undefined && <Sheet sheet={value} />}
    </>
  );
}

function Sheet({ sheet }: { readonly sheet: SheetDocument }) {
  const { change, verified } = sheet;
  const changing = sheet.loops.filter(({ changes }) => changes);
  const staying = sheet.loops.filter(({ changes }) => !changes);
  return (
    <article class="sheet">
      <header class="page-head">
        <h1>Change sheet, {sheet.unitName}</h1>
        <p class="buttons not-printed">
          <button type="button" class="action" onClick={() => print()}>
            Print
          </button>
          <a href={addresses.sheet(change.id, 'csv')} download={`${change.id}.csv`}>
            as CSV
          </a>
          <a href={addresses.sheet(change.id, 'json')} download={`${change.id}.json`}>
            as JSON
          </a>
        </p>
        {change.state !== 'approved' && (
          <p class="notice notice-bad">
            This change is {change.state}, not approved. Nothing may be dialled from this sheet.
          </p>
        )}
        <dl class="facts">
          <div>
            <dt>Change</dt>
            <dd>{change.id}</dd>
          </div>
          <div>
            <dt>State</dt>
            <dd>
              <StateMark state={change.state} />
            </dd>
          </div>
          <div>
            <dt>Alternative</dt>
            <dd>
              {change.alternative} of job {change.job}
            </dd>
          </div>
          <div>
            <dt>Proposed</dt>
            <dd>
              {change.proposed.person}, <Moment at={change.proposed.at} />: {change.proposed.reason}
            </dd>
          </div>
          {change.decided !== null && (
            <div>
              <dt>{change.state === 'rejected' ? 'Rejected' : 'Approved'}</dt>
              <dd>
                {change.decided.person}, <Moment at={change.decided.at} />: {change.decided.reason}
              </dd>
            </div>
          )}
          <div>
            <dt>Verified</dt>
            <dd>
              {verified.models - verified.failures} of {verified.models} models within every limit
              {verified.models > 1 &&
                `; with 95 % confidence at least ${atLeastPercent(verified.confidence)} of all like them`}
            </dd>
          </div>
        </dl>
      </header>
      <h2>Before, during and after</h2>
      <ul class="cautions">
        {sheet.cautions.map((words) => (
          <li key={words}>{words}</li>
        ))}
      </ul>
      <h2>What to dial, in this order</h2>
      {changing.map((loop, index) => (
        <SheetLoop key={loop.tag} loop={loop} place={index + 1} />
      ))}
      {staying.length > 0 && <p>Stay as they are: {staying.map(({ tag }) => tag).join(', ')}.</p>}
      <h2>What to expect of the unit</h2>
      <ExpectationTable label="What to expect of the unit" rows={sheet.objectives} />
      <p class="quiet">
        A speed of 1.00 is as fast as {referenceInWords(sheet.reference)}; less is faster. Each
        upset was simulated for {figure(sheet.horizon)} {sheet.timeUnit}. {todayInWords(sheet)}
      </p>
      {sheet.assumed.length > 0 && (
        <>
          <h2>Assumed, for the job does not state it</h2>
          <ul class="words">
            {sheet.assumed.map((words) => (
              <li key={words}>{words}</li>
            ))}
          </ul>
        </>
      )}
      <p class="fingerprints">
        Sheet <code>{sheet.hash}</code>
        <br />
        Job document <code>{change.jobHash}</code>
        <br />
        Front <code>{change.frontHash}</code>
      </p>
    </article>
  );
}

function todayInWords({ today }: SheetDocument): string {
  if (today === null) return 'Not every closed loop has settings today.';
  if (!today.stable) return "Today's settings are unstable.";
  if (today.unstableModels === 0) return '';
  return `Today's settings are unstable on ${counted(today.unstableModels, 'model')}.`;
}
