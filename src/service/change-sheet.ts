import {
  type ChangeRecord,
  controllerInWords,
  type DrivesDocument,
  type FrontDocument,
  type JobDocument,
  type LoopDocument,
  type LoopSettingsDocument,
  moveInWords,
  type OwnSettings,
  type SheetDocument,
  type SheetLoop,
  type SheetSetting,
  settingNames,
  settingUnits,
  settingWords,
  sheetFormat,
} from '../contract/index.js';
import { hashOf } from '../study/index.js';
import { cautionsOf } from './change-sheet-cautions.js';
import { loopExpectations, objectiveExpectations } from './change-sheet-figures.js';
import { loopNotes } from './change-sheet-notes.js';
import { ServiceProblem } from './problem.js';
import type { Proposed } from './proposed.js';

/** What a sheet is made from: the change, and the documents it is bound to. */
export interface SheetSources {
  readonly job: JobDocument;
  readonly front: FrontDocument;
  readonly change: ChangeRecord;
  /** Settings that people kept for the job: a change may propose one of them. */
  readonly own?: readonly OwnSettings[];
}

/**
 * The document that takes one alternative to the control room: every loop's settings in its own
 * units, old and new, what to expect and what to mind. The same sources give the same bytes.
 * @throws {ServiceProblem} ALTERNATIVE_UNKNOWN where nothing has the name that the change proposes
 */
export function changeSheet({ job, front, change, own = [] }: SheetSources): SheetDocument {
  const proposable: readonly Proposed[] = [...front.alternatives, ...own];
  const alternative = proposable.find(({ id }) => id === change.alternative);
  if (alternative === undefined) {
    const problem = `job ${change.job} has no settings called ${change.alternative}`;
    throw new ServiceProblem('ALTERNATIVE_UNKNOWN', problem);
  }
  const { models, failures, confidence } = alternative.verified;
  const loops = inOrderOfChange(job).map((loop) => sheetLoop(loop, job, front, alternative));
  const sheet: Omit<SheetDocument, 'hash'> = {
    format: sheetFormat,
    change,
    unitName: front.unitName,
    timeUnit: front.timeUnit,
    horizon: front.horizon,
    compute: front.compute,
    reference: front.reference,
    today:
      front.present === null
        ? null
        : {
            stable: front.present.nominal.unit.stable,
            unstableModels: front.present.worst.unit.unstableModels ?? 0,
          },
    objectives: objectiveExpectations(front.present, alternative),
    verified: { models, failures, confidence },
    loops,
    assumed: front.assumed,
    cautions: cautionsOf(job, change, alternative, loops),
  };
  return { ...sheet, hash: hashOf(sheet) };
}

function sheetLoop(
  loop: LoopDocument,
  job: JobDocument,
  front: FrontDocument,
  alternative: Proposed,
): SheetLoop {
  const { tag, controller } = loop;
  const settings = sheetSettings(job, loop, alternative.settings[tag]);
  const changes = settings.some((setting) => setting.old !== setting.new);
  return {
    tag,
    measurement: loop.measurement,
    drives: drivesInWords(loop.drives),
    task: loop.task,
    controller: `${controllerInWords(controller)}, ${signInWords(loop)}`,
    action: loop.action ?? null,
    settings,
    changes,
    expectations: loopExpectations(job, loop, front.present, alternative),
    notes: changes ? loopNotes(loop, job, front.present, alternative) : [],
  };
}

/**
 * Old and new numbers of a loop, for every setting that either names. A setting left out stands for
 * zero in a controller that runs; a loop in manual to stay has none to dial.
 */
function sheetSettings(
  job: JobDocument,
  loop: LoopDocument,
  proposed: LoopSettingsDocument | undefined,
): SheetSetting[] {
  const { present } = loop;
  const dialled = proposed ?? present;
  if (loop.task === 'manual' || dialled === undefined) return [];
  const units = settingUnits(job, loop);
  const words = settingWords(loop.controller);
  return settingNames
    .filter((name) => present?.[name] !== undefined || dialled[name] !== undefined)
    .map((name) => {
      const old = present === undefined ? null : (present[name] ?? 0);
      const proposed = dialled[name] ?? 0;
      return {
        setting: name,
        name: words[name],
        unit: units[name],
        old,
        new: proposed,
        effect: moveInWords(name, loop.controller, old, proposed),
      };
    });
}

/** Which way a positive gain acts. */
const signInWords = ({ action }: LoopDocument): string =>
  action === undefined
    ? 'the sign is part of the gain: output = gain (SP - PV)'
    : `${action} action, gains without sign`;

const drivesInWords = (drives: DrivesDocument): string =>
  typeof drives === 'string' ? drives : `setpoint of ${drives.loop}`;

/** Loops as the job lists them, each inner loop before the loop that drives it. */
function inOrderOfChange({ loops }: JobDocument): LoopDocument[] {
  const ordered = new Set<LoopDocument>();
  const add = (loop: LoopDocument): void => {
    const { drives } = loop;
    const inner =
      typeof drives === 'string' ? undefined : loops.find(({ tag }) => tag === drives.loop);
    if (inner !== undefined && !ordered.has(inner)) add(inner);
    ordered.add(loop);
  };
  for (const loop of loops) add(loop);
  return [...ordered];
}
