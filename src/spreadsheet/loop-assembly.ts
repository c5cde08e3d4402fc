import { type Entry, textOf } from './entry.js';
import { type EntryTimes, type EntryWriter, timeUnitOf } from './entry-writer.js';
import { feedforwardLoop, loopFields } from './layout/loop-fields.js';
import type { PlacedDocument } from './placed-document.js';
import type { SheetFindings } from './sheet-findings.js';

const fieldNamed = (heading: string) => {
  const [field] = loopFields.filter((one) => one.heading === heading);
  return field ?? feedforwardLoop;
};

const tag = fieldNamed('tag');
const settingsUnit = fieldNamed('settings time unit');
const scanUnit = fieldNamed('scan unit');
const presentGain = fieldNamed('gain');
const bounded = ['gain', 'integral', 'derivative', 'filter'];

/** Puts loops into the document, and the feedforward terms of each. */
export class LoopAssembly {
  private count = 0;
  private readonly byTag = new Map<string, number>();
  private readonly terms = new Map<number, number>();

  constructor(
    private readonly document: PlacedDocument,
    private readonly writer: EntryWriter,
    private readonly findings: SheetFindings,
    private readonly times: EntryTimes,
  ) {}

  add(entry: Entry): void {
    const base = ['loops', this.count];
    const { job } = this.times;
    const settings = timeUnitOf(entry, settingsUnit, job);
    const scan = timeUnitOf(entry, scanUnit, job);
    this.document.ensure([...base, 'controller'], {});
    this.writer.write(base, entry, { job, settings, scan });
    this.writer.nameNominal([...base, 'limits']);
    for (const name of bounded) this.writer.complete([...base, 'bounds', name]);
    const gain = entry.slots.find(({ field }) => field === presentGain);
    this.document.mark([...base, 'present'], gain?.place ?? entry.anchor);
    const own = textOf(entry, tag);
    if (own !== undefined && !this.byTag.has(own)) this.byTag.set(own, this.count);
    this.count += 1;
  }

  addFeedforward(entry: Entry): void {
    const loop = this.byTag.get(textOf(entry, feedforwardLoop) ?? '');
    if (loop === undefined) {
      const place = entry.slots.find(({ field }) => field === feedforwardLoop)?.place;
      const problem = 'no loop has this tag';
      this.findings.fault('REFERENCE_UNKNOWN', place ?? entry.anchor, problem, 'the tag of a loop');
      return;
    }
    const index = this.terms.get(loop) ?? 0;
    this.terms.set(loop, index + 1);
    this.document.mark(['loops', loop, 'feedforward'], entry.anchor);
    this.writer.write(['loops', loop, 'feedforward', index], entry, this.times);
  }
}
