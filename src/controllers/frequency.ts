import type { DiscreteController } from './algorithm.js';

/** Complex values of one controller at one frequency, written in place. */
export interface ControllerResponse {
  /** From the measurement to minus the output. */
  measurementRe: number;
  measurementIm: number;
  /** From the setpoint to the output. */
  setpointRe: number;
  setpointIm: number;
}

/**
 * Frequency response of the sampled controller at z = exp(i angle), angle in (0, pi].
 * Exact for the position algorithm of `DiscreteController`.
 */
export function respondController(
  c: DiscreteController,
  angle: number,
  out: ControllerResponse,
): void {
  // q = 1 / z
  const qr = Math.cos(angle);
  const qi = -Math.sin(angle);
  // 1 - q, computed without cancellation at small angles
  const half = Math.sin(angle / 2);
  const er = 2 * half * half;
  const ei = -qi;
  const es = er * er + ei * ei;
  const ir = (c.ki * er) / es;
  const ii = (-c.ki * ei) / es;
  let dr = 0;
  let di = 0;
  if (c.kd !== 0) {
    const ar = 1 - c.derivativeDecay * qr;
    const ai = -c.derivativeDecay * qi;
    const as = ar * ar + ai * ai;
    dr = (c.kd * (er * ar + ei * ai)) / as;
    di = (c.kd * (ei * ar - er * ai)) / as;
  }
  out.setpointRe = c.setpointWeight * c.kp + ir + c.derivativeSetpointWeight * dr;
  out.setpointIm = ii + c.derivativeSetpointWeight * di;
  const tr = c.kp + ir + dr;
  const ti = ii + di;
  if (c.filterDecay === 0) {
    out.measurementRe = tr;
    out.measurementIm = ti;
    return;
  }
  const gain = 1 - c.filterDecay;
  const br = 1 - c.filterDecay * qr;
  const bi = -c.filterDecay * qi;
  const bs = br * br + bi * bi;
  let fr = (gain * br) / bs;
  let fi = (-gain * bi) / bs;
  if (c.filterOrder === 2) {
    const held = fr * fr - fi * fi;
    fi = 2 * fr * fi;
    fr = held;
  }
  out.measurementRe = tr * fr - ti * fi;
  out.measurementIm = tr * fi + ti * fr;
}
