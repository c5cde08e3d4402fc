/** What messages about documents say in the terms of JSON, and how it is said of cells. */
const words: readonly (readonly [document: RegExp, spreadsheet: string])[] = [
  [/a tag, or \{ "setpointOf": loop tag \}/g, 'a tag; that of a loop under from setpoint of'],
  [
    /an actuator tag, or \{ "loop": loop tag \}/g,
    'an actuator tag; that of a loop under drives loop',
  ],
  [
    /the tag of an actuator, or \{ "loop": loop tag \}/g,
    'the tag of an actuator; that of a loop under drives loop',
  ],
  [
    /a disturbance tag, or \{ "outputOf": loop tag \}/g,
    'a disturbance tag; that of a loop under from output of',
  ],
  [/a number, or \{ "(?:max|min)": number, "nominal": true \}/g, 'a number'],
  [/absent, or "goal": "averaging"/g, 'an empty cell, or the goal averaging'],
  [/\["speed", "robustness"\]/g, 'speed; robustness'],
  [/the pairs of unit\.responses/g, 'the pairs of the rows without an operating point'],
  [/\btimeConstants \[T1, T2\]/g, 'time constant and second time constant'],
  [/\[low, high\]/g, 'the low one first'],
  [/\babsent, or\b/g, 'an empty cell, or'],
  [/\btrue or false\b/g, 'yes, no'],
  [/\ban object\b/g, 'its cells filled'],
  [/\ba list\b/g, 'rows'],
  [/\bentries\b/g, 'rows'],
  [/"/g, ''],
];

/** A sentence about a document as one about a spreadsheet. */
export function inSpreadsheetWords(sentence: string): string {
  let text = sentence;
  for (const [document, spreadsheet] of words) text = text.replace(document, spreadsheet);
  return text.replace(
    /\b(?:maxChange|outputLow|outputHigh|loadStep|upsetWeights|timeConstants?|deadTime)\b/g,
    spacedWords,
  );
}

/** Keys as headings: `timeConstant` is `time constant`. */
export const spacedWords = (text: string): string =>
  text.replace(
    /([a-z])([A-Z])/g,
    (_, before: string, after: string) => `${before} ${after.toLowerCase()}`,
  );
