/**
 * The marks of the plane, each with a shape of its own, in a box of 20 by 20: the shuttle for what
 * Heddle found, the heddle's eye for today's settings, the reed for published rules, the bobbin for
 * what somebody has wound by hand.
 */
export const markShapes = {
  alternative: 'M1 10C6 4.5 14 4.5 19 10C14 15.5 6 15.5 1 10Z',
  present: 'M10 0V4M10 16V20M10 4C4.5 7.5 4.5 12.5 10 16C15.5 12.5 15.5 7.5 10 4Z',
  rule: 'M4 3V17M10 3V17M16 3V17M4 10H16',
  own: 'M4 2H16V5H13V15H16V18H4V15H7V5H4Z',
} as const;
