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
  }
}

/** A gain whose sign disagrees with the response feeds back positively, which is seldom meant. */
function adviseOnSign(
  loop: Entry<LoopAsWritten>,
  process: number | undefined,
  findings: Findings,
): void {
  const { present, action } = loop.value;
  if (present === undefined || process === undefined || process === 0) return;
  const acting = action === undefined ? Math.sign(present.gain) : action === 'reverse' ? 1 : -1;
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
