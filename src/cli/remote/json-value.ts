/** The value of JSON text; undefined where it is none. */
export function jsonValue(text: string | Uint8Array): unknown {
  try {
    return JSON.parse(typeof text === 'string' ? text : new TextDecoder().decode(text));
  } catch {
    return undefined;
  }
}
