import type { Workbench } from '../study/index.js';

export function estimateSeconds(_bench: Workbench, _threads: number): number {
  return 0;
}
