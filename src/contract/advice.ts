import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import { loopsByTag, processDirection } from './loop-paths.js';
import type { LoopAsWritten } from './loops.js';
import { integratorsOf } from './model-facts.js';
import { pointOfTag, ResponseGraph } from './response-graph.js';
import type { ResponseDocument } from './responses.js';
import { secondsPer } from './scalars.js';

/** Warns of what is allowed but seldom meant. */
export function advise(draft: Draft, findings: Findings): void {
  const loops = loopsByTag(draft);
  const graph = new ResponseGraph(draft.responses.entries);
  for (const loop of draft.loops.entries) {
    adviseOnSign(loop, processDirection(loop.value, loops, graph), findings);
    adviseOnFilter(loop, draft, findings);
    adviseOnPresent(loop, findings);
    adviseOnIntegral(loop, graph, findings);
  }
  for (const list of [draft.responses, ...draft.points.map((point) => point.responses)]) {
    for (const response of list.entries) adviseOnEnd(response, findings);
  }
}

/** Share of a step response's range by which its last tenth may still move. */
const settledShare = 0.05;

/** A step response that was broken off early has another gain than its last value. */
function adviseOnEnd({ path, value }: Entry<ResponseDocument>, findings: Findings): void {
  const { model } = value;
  if (model.kind !== 'step-response' || model.integrating) return;
  const { values } = model;
  const tail = values.slice(-Math.ceil(values.length / 10) - 1);
  const rangeOf = (list: readonly number[]): number =>
    list.reduce((most, v) => Math.max(most, v), list[0] ?? 0) -
    list.reduce((least, v) => Math.min(least, v), list[0] ?? 0);
  if (rangeOf(tail) <= settledShare * rangeOf([0, ...values])) return;
  const problem =
    'the values end while the measurement still moves: the last one is taken as the gain';
  findings.warning([...path, 'model', 'values'], problem);
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

/** Two integrators in a row swing without end, unless a lead of the process damps them. */
function adviseOnIntegral(
  loop: Entry<LoopAsWritten>,
  graph: ResponseGraph,
  findings: Findings,
): void {
  const { controller, drives, measurement, task } = loop.value;
  if (controller.terms !== 'I' || typeof drives !== 'string' || task === 'manual') return;
  const own = graph.between([pointOfTag(drives)], pointOfTag(measurement));
  if (!own.some(({ value }) => integratorsOf(value.model) > 0)) return;
  const problem =
    'integral action alone on a response that integrates: nothing damps it, unless the response has a lead';
  findings.warning([...loop.path, 'controller', 'terms'], problem);
}

/** A retuned loop without present settings is one to be brought into service. */
function adviseOnPresent({ path, value }: Entry<LoopAsWritten>, findings: Findings): void {
  if (value.task !== 'retune' || value.present !== undefined) return;
  const problem =
    'without present settings the loop is taken to stand in manual and is to be brought into ' +
    'service: the search starts from a published rule, and there is no present tuning to compare with';
  findings.warning([...path, 'present'], problem);
}
