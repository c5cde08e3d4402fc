/**
 * The media type that an Accept header asks for most, of those there are; undefined where it takes
 * none of them. Between equals the first stands.
 * @source RFC 9110, section 12.5.1
 */
export function acceptedType<Type extends string>(
  accept: string | undefined,
  offered: readonly [Type, ...Type[]],
): Type | undefined {
  const [first] = offered;
  if (accept === undefined || accept.trim() === '') return first;
  const ranges = accept.split(',').map(readRange);
  let best: Type | undefined;
  let most = 0;
  for (const type of offered) {
    const quality = qualityOf(type, ranges);
    if (quality > most) [best, most] = [type, quality];
  }
  return best;
}

interface MediaRange {
  readonly type: string;
  readonly quality: number;
}

function readRange(text: string): MediaRange {
  const [type = '', ...parameters] = text.split(';').map((part) => part.trim().toLowerCase());
  const stated = parameters.find((parameter) => parameter.startsWith('q='))?.slice(2);
  const quality = stated === undefined ? 1 : Number(stated);
  return { type, quality: quality >= 0 && quality <= 1 ? quality : 0 };
}

/** That of the range that says most about the type. */
function qualityOf(type: string, ranges: readonly MediaRange[]): number {
  for (const name of [type, `${type.split('/', 1)[0]}/*`, '*/*']) {
    const range = ranges.find((one) => one.type === name);
    if (range !== undefined) return range.quality;
  }
  return 0;
}
