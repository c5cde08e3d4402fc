import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import { loopsByTag, processDirection } from './loop-paths.js';
import type { LoopAsWritten } from './loops.js';
import { ResponseGraph } from './response-graph.js';
import { secondsPer } from './scalars.js';

/** Warns of what is allowed but seldom meant. */
export function advise(draft: Draft, findings: Findings): void {
  const loops = loopsByTag(draft);
  const graph = new ResponseGraph(draft.responses.entries);
  for (const loop of draft.loops.entries) {
    adviseOnSign(loop, processDirection(loop.value, loops, graph), findings);
    adviseOnFilter(loop, draft, findings);
    adviseOnPresent(loop, findings);
  }
}

/** A gain whose sign disagrees with the response feeds back positively, which is seldom meant. */
function adviseOnSign(
  loop: Entry<LoopAsWritten>,
  process: number | undefined,
  findings: Findings,
): void {
  const { present, action } = loop.value;
  if (process === undefined || process === 0) return;
  const named = action === 'reverse' ? 1 : -1;
  const acting = action === undefined ? Math.sign(present?.gain ?? 0) : named;
  if (acting * process >= 0) return;
  const way = process > 0 ? 'raises' : 'lowers';
  const key = action === undefined ? ['present', 'gain'] : ['action'];
  const problem = `the controller acts against its response: a rising output ${way} the measurement`;
  findings.warning([...loop.path, ...key], problem);
}

/** Where derivative acts the filter is at least one scan. */
function adviseOnFilter(loop: Entry<LoopAsWritten>, draft: Draft, findings: Findings): void {
  const { present, controller } = loop.value;
  const { timeUnit } = draft;
  if (timeUnit === undefined || present === undefined || !((present.derivative ?? 0) > 0)) return;
  const filter = (present.filter ?? 0) * secondsPer[controller.timeUnit ?? timeUnit];
  const scan = controller.scan * secondsPer[controller.scanUnit ?? timeUnit];
  if (filter >= scan * (1 - 1e-9)) return;
  const problem = 'derivative acts on a filtered PV: the filter is taken as one scan';
  findings.warning([...loop.path, 'present', 'filter'], problem);
}

/** A retuned loop without present settings is one to be brought into service. */
function adviseOnPresent({ path, value }: Entry<LoopAsWritten>, findings: Findings): void {
  if (value.task !== 'retune' || value.present !== undefined) return;
  const problem =
    'without present settings the loop is taken to stand in manual and is to be brought into ' +
    'service: the search starts from a published rule, and there is no present tuning to compare with';
  findings.warning([...path, 'present'], problem);
}
