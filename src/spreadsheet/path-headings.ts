import { bareWords } from './layout/field.js';
import { layoutNamed, layouts, type SheetLayout } from './layout/sheets.js';

/** A path without the numbers of its entries: `loops[3].controller.scan` is `loops.controller.scan`. */
const bare = (path: string): string => path.replace(/\[\d+\]/g, '').replace(/^\./, '');

const headings = new Map<string, string>();
for (const layout of Object.values(layouts)) {
  for (const field of layout.fields) {
    if (field.path.length === 0) continue;
    const steps = [
      ...layout.path,
      ...(layout.name === 'feedforward' ? ['feedforward'] : []),
      ...field.path,
    ];
    const key = steps.filter((step) => typeof step === 'string').join('.');
    if (!headings.has(key)) headings.set(key, field.heading);
  }
}

/** The heading that the values of a place in the document have. */
export const headingFor = (path: string): string | undefined =>
  headings.get(bare(path).replace(/^unit\.operatingPoints\.responses/, 'unit.responses'));

/** The layout of a sheet that is there or missing. */
export const layoutOf = (sheet: string): SheetLayout | undefined => {
  const name = layoutNamed(bareWords(sheet));
  return name === undefined ? undefined : layouts[name];
};
