import { useEffect, useRef } from 'preact/hooks';
import { SheetPage } from './change/sheet-page.js';
import { JobPage } from './job/job-page.js';
import { HandIn } from './jobs/hand-in.js';
import { JobList } from './jobs/job-list.js';
import { links, type Route, useRoute } from './route.js';

/** The page: what stands on every view, and the view that the address names. */
export function App() {
  const route = useRoute();
  const main = useRef<HTMLElement>(null);
  const place = placeOf(route);
  const shown = useRef(place);

  // A new view is begun at its top and by whoever listens; the first is where the browser put them.
  useEffect(() => {
    document.title = titleOf(route);
    if (shown.current === place) return;
    shown.current = place;
    scrollTo(0, 0);
    main.current?.focus({ preventScroll: true });
  });

  return (
    <>
      {/* biome-ignore lint/a11y/useValidAnchor: the part of the address behind # names the view */}
      <a
        class="skip"
        href="#main"
        onClick={(event) => {
          event.preventDefault();
          main.current?.focus();
        }}
      >
        To the content
      </a>
      <header class="masthead">
        <a class="wordmark" href={links.jobs}>
          <svg viewBox="0 0 32 32" aria-hidden="true">
            <path d="M16 1V9M16 23V31M16 9C10.5 13 10.5 19 16 23C21.5 19 21.5 13 16 9Z" />
            <path class="weft" d="M1 16H31" />
          </svg>
          Heddle
        </a>
        <nav aria-label="Views">
          <ul>
            <li>
              <a href={links.jobs} aria-current={route.view === 'jobs' ? 'page' : undefined}>
                Jobs
              </a>
            </li>
            <li>
              <a href={links.handIn} aria-current={route.view === 'hand-in' ? 'page' : undefined}>
                Hand in
              </a>
            </li>
          </ul>
        </nav>
        <p class="promise">Proposes settings. Writes to no control system.</p>
      </header>
      <main id="main" ref={main} tabIndex={-1}>
        <View route={route} />
      </main>
    </>
  );
}

function View({ route }: { readonly route: Route }) {
  switch (route.view) {
    case 'jobs':
      return <JobList />;
    case 'hand-in':
      return <HandIn />;
    case 'job':
      return <JobPage key={route.job} id={route.job} look={route.look} />;
    case 'sheet':
      return <SheetPage key={route.change} job={route.job} change={route.change} />;
    case 'unknown':
      return (
        <header class="page-head">
          <h1>There is no such view</h1>
          <p>
            Nothing stands at <code>{route.address}</code>. <a href={links.jobs}>To the jobs</a>
          </p>
        </header>
      );
  }
}

/** What stays the same while a reader moves within one view. */
function placeOf(route: Route): string {
  switch (route.view) {
    case 'job':
      return `job ${route.job}`;
    case 'sheet':
      return `sheet ${route.change}`;
    default:
      return route.view;
  }
}

function titleOf(route: Route): string {
  switch (route.view) {
    case 'jobs':
      return 'Jobs - Heddle';
    case 'hand-in':
      return 'Hand in a job - Heddle';
    case 'job':
      return `${[route.job, route.look.chosen].filter((part) => part !== null).join(' ')} - Heddle`;
    case 'sheet':
      return `Change sheet ${route.change} - Heddle`;
    case 'unknown':
      return 'No such view - Heddle';
  }
}
