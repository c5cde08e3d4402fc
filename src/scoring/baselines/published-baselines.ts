import type { ControllerSettings, Loop } from '../../controllers/index.js';
import { amigo, amigoSource } from './amigo.js';
import { averagingLevel } from './averaging-level.js';
import { bltSource, detune } from './biggest-log-modulus.js';
import type { Baseline, RuleContext, RuleLoop } from './context.js';
import { lambda, lambdaSource } from './lambda.js';
import { ownLoopOf } from './own-response.js';
import type { LoopRule } from './rule-terms.js';
import { simc, simcSource } from './simc.js';
import { zieglerNichols, zieglerNicholsSource } from './ziegler-nichols.js';

/**
 * What the published tuning rules make of a whole unit, one complete set of settings a rule.
 *
 * Each loop is tuned by its own response, inner loops first. Kept loops stay as they are, averaging
 * levels are tuned as such whatever the rule. A loop to which a rule does not apply takes SIMC, or
 * failing that its present settings, and the baseline says so.
 */
export function publishedBaselines(context: RuleContext): Baseline[] {
  const retuned = context.loops.filter((l) => l.retuned);
  if (retuned.length > 0 && retuned.every((l) => l.averaging)) {
    // Averaging levels are tuned as such whatever the rule: one set, under its own name.
    return [loopByLoop(context, 'averaging PI', 'common practice', simc)];
  }
  return [
    loopByLoop(context, 'SIMC', simcSource, simc),
    loopByLoop(context, 'lambda', lambdaSource, lambda),
    loopByLoop(context, 'AMIGO', amigoSource, amigo),
    loopByLoop(context, 'Ziegler-Nichols', zieglerNicholsSource, zieglerNichols),
    wholeUnit(context),
  ];
}

/** The same settings with half the gain in every retuned loop, integral and derivative times kept. */
export function halveGains(
  settings: readonly (ControllerSettings | null)[],
  loops: readonly { readonly retuned: boolean }[],
): (ControllerSettings | null)[] {
  return settings.map((own, i) => (own && loops[i]?.retuned ? { ...own, kc: own.kc / 2 } : own));
}

interface Assembly {
  readonly settings: (ControllerSettings | null)[];
  /** What the loops that are not by the rule are by, by loop number. */
  readonly remarks: Map<number, string>;
  /** Loops left without any settings. */
  readonly missing: string[];
  /** No loop is by the rule: all are as they are today. */
  readonly unmoved: boolean;
}

function loopByLoop(
  context: RuleContext,
  method: string,
  source: string,
  rule: LoopRule,
): Baseline {
  return finish(method, source, assemble(context, rule));
}

function finish(
  method: string,
  source: string,
  { settings, remarks, missing, unmoved }: Assembly,
): Baseline {
  if (missing.length > 0) {
    const reason = `no rule applies to ${missing.join(', ')}, and there are no present settings`;
    return { method, source, settings: null, reason };
  }
  if (unmoved) {
    return { method, source, settings: null, reason: 'the rule applies to no loop of this unit' };
  }
  if (remarks.size > 0)
    return { method, source, settings, reason: [...remarks.values()].join('; ') };
  return { method, source, settings };
}

/** Settings of all loops by one rule, from the inner loops outwards. */
function assemble(context: RuleContext, rule: LoopRule): Assembly {
  const { network, present } = context;
  const settings: (ControllerSettings | null)[] = network.loops.map(() => null);
  const remarks = new Map<number, string>();
  const missing: string[] = [];
  let moved = 0;
  for (const index of network.order.toReversed()) {
    const loop = context.loops[index] as RuleLoop;
    if (!(network.loops[index] as Loop).automatic) continue;
    const today = present[index] ?? null;
    if (!loop.retuned) settings[index] = today;
    else {
      const own = ownLoopOf(context, index, settings);
      const byRule = loop.averaging ? averagingLevel(own, network.loops[index] as Loop) : rule(own);
      const second = byRule ?? (rule === simc || loop.averaging ? null : simc(own));
      settings[index] = second ?? today;
      if (second !== null) moved += 1;
      if (second === null && today !== null) remarks.set(index, `${loop.tag} as it is today`);
      else if (byRule === null) remarks.set(index, `${loop.tag} by SIMC`);
    }
    if (settings[index] === null) missing.push(loop.tag);
  }
  return { settings, remarks, missing, unmoved: moved === 0 };
}

/** BLT of the outermost tight loops, with the loops inside them by SIMC. */
function wholeUnit(context: RuleContext): Baseline {
  const method = 'BLT';
  const assembly = assemble(context, simc);
  const base = finish(method, bltSource, assembly);
  if (base.settings === null) return base;
  const detuned = context.network.outermost.filter((index) => {
    const loop = context.loops[index] as RuleLoop;
    return loop.retuned && !loop.averaging && loop.terms !== 'I';
  });
  if (detuned.length === 0) {
    return {
      method,
      source: bltSource,
      settings: null,
      reason: 'no outermost tight loop is retuned',
    };
  }
  const owns = detuned.map((index) => ownLoopOf(context, index, assembly.settings));
  const detuning = detune(context, assembly.settings, detuned, owns);
  if ('reason' in detuning)
    return { method, source: bltSource, settings: null, reason: detuning.reason };
  const remarks = new Map(assembly.remarks);
  context.loops.forEach(({ retuned, averaging, tag }, i) => {
    if (detuned.includes(i)) remarks.delete(i);
    else if (retuned && !averaging && assembly.settings[i] && !remarks.has(i)) {
      remarks.set(i, `${tag} by SIMC`);
    }
  });
  return finish(method, bltSource, { ...assembly, settings: [...detuning.settings], remarks });
}
