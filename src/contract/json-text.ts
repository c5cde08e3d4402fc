import { excerpt, pathText, shortened } from './excerpt.js';
import { type Fault, type FaultCode, mostFaults } from './faults.js';

/** Nesting beyond this is no document of ours. */
const deepest = 32;
/** Values beyond this would cost more to judge than any real document needs. */
const mostValues = 1_000_000;

export type JsonReading =
  | { readonly ok: true; readonly value: unknown }
  | {
      readonly ok: false;
      readonly faults: readonly Fault[];
      /** Faults beyond those listed. */
      readonly more: number;
    };

/**
 * The value a JSON text stands for, or where and why it stands for none.
 *
 * Strict RFC 8259. Unlike the built-in parser it refuses a key that an object names twice (the
 * built-in one silently keeps the last), and says line, column and place of what it refuses.
 * @param text  without byte order mark
 */
export function readJson(text: string): JsonReading {
  const reader = new JsonReader(text);
  try {
    const value = reader.document();
    const { faults, more } = reader;
    if (faults.length > 0) return { ok: false, faults, more };
    return { ok: true, value };
  } catch (error) {
    if (!(error instanceof Unreadable)) throw error;
    return { ok: false, faults: [...reader.faults, error.fault], more: reader.more };
  }
}

/** Ends the reading: after it nothing in the text can be trusted. */
class Unreadable extends Error {
  constructor(
    readonly fault: Fault,
    options?: { readonly cause: unknown },
  ) {
    super(fault.problem, options);
  }
}

const numberShape = /-?(?:0|[1-9]\d*)(?:\.\d+)?(?:[eE][+-]?\d+)?/y;
const wordShape = /[-+]?[A-Za-z_$][\w$]*|[^\s]/uy;
const infinite = /^[-+]?(?:nan|inf|infinity)$/i;
const reserved = '__proto__';
const openBrace = 0x7b;
const openBracket = 0x5b;
const quote = 0x22;
const backslash = 0x5c;

class JsonReader {
  readonly faults: Fault[] = [];
  more = 0;
  private at = 0;
  private values = 0;
  private readonly path: (string | number)[] = [];
  /** The line that the latest place asked for lies in, so that places cost one pass together. */
  private line = { number: 1, start: 0 };

  constructor(private readonly text: string) {}

  document(): unknown {
    this.blank();
    if (this.at === this.text.length) throw this.invalid('the document is empty', 'a JSON object');
    const value = this.value();
    this.blank();
    if (this.at < this.text.length)
      throw this.invalid('text after the end of the document', 'nothing');
    return value;
  }

  private value(): unknown {
    this.values += 1;
    if (this.values > mostValues) {
      throw this.unreadable('DOCUMENT_TOO_LARGE', 'more values than Heddle reads', {
        value: `more than ${mostValues} values`,
        allowed: `at most ${mostValues} values`,
      });
    }
    switch (this.text.charCodeAt(this.at)) {
      case openBrace:
        return this.object();
      case openBracket:
        return this.list();
      case quote:
        return this.string();
      default:
        return this.wordOrNumber();
    }
  }

  private object(): Record<string, unknown> {
    const object: Record<string, unknown> = {};
    this.deeper();
    if (this.next('}')) return object;
    do {
      this.blank();
      if (this.text.charCodeAt(this.at) !== quote)
        throw this.invalid('a key was expected', 'a key in double quotes');
      const start = this.at;
      const key = this.string();
      this.path.push(key);
      this.judgeKey(object, key, start);
      if (!this.next(':')) throw this.invalid('a colon was expected after the key', ':');
      this.blank();
      const value = this.value();
      if (key !== reserved) object[key] = value;
      this.path.pop();
    } while (this.next(','));
    if (!this.next('}')) throw this.invalid('the object does not go on here', ', or }');
    return object;
  }

  private judgeKey(object: object, key: string, start: number): void {
    const again = key !== reserved && Object.hasOwn(object, key);
    if (key !== reserved && !again) return;
    if (this.faults.length >= mostFaults) {
      this.more += 1;
      return;
    }
    const place = this.place(start);
    const value = excerpt(key);
    if (again) {
      const problem = `${place}: the object has this key already`;
      this.faults.push(this.fault('KEY_DUPLICATE', problem, { value, allowed: 'each key once' }));
    } else {
      const problem = `${place}: this key is reserved`;
      this.faults.push(this.fault('KEY_RESERVED', problem, { value, allowed: 'any other key' }));
    }
  }

  private list(): unknown[] {
    const list: unknown[] = [];
    this.deeper();
    if (this.next(']')) return list;
    do {
      this.blank();
      this.path.push(list.length);
      list.push(this.value());
      this.path.pop();
    } while (this.next(','));
    if (!this.next(']')) throw this.invalid('the list does not go on here', ', or ]');
    return list;
  }

  private string(): string {
    const start = this.at;
    let escaped = false;
    for (this.at += 1; this.at < this.text.length; this.at += 1) {
      const code = this.text.charCodeAt(this.at);
      if (code === quote) {
        this.at += 1;
        if (!escaped) return this.text.slice(start + 1, this.at - 1);
        return this.unescaped(start);
      }
      if (code < 0x20)
        throw this.invalid(
          'a line break or control character inside a text',
          'an escape such as \\n',
        );
      if (code === backslash) {
        escaped = true;
        this.at += 1;
      }
    }
    this.at = start;
    throw this.invalid('a text that never ends', 'a closing double quote');
  }

  private unescaped(start: number): string {
    try {
      return JSON.parse(this.text.slice(start, this.at)) as string;
    } catch (error) {
      this.at = start;
      const allowed = '\\" \\\\ \\/ \\b \\f \\n \\r \\t \\uXXXX';
      const { fault } = this.invalid('a text with an escape that JSON does not have', allowed);
      throw new Unreadable(fault, { cause: error });
    }
  }

  private wordOrNumber(): unknown {
    numberShape.lastIndex = this.at;
    const number = numberShape.exec(this.text)?.[0];
    const start = this.at;
    if (number !== undefined && !/[\w.+]/.test(this.text[start + number.length] ?? '')) {
      this.at += number.length;
      const value = Number(number);
      if (Number.isFinite(value)) return value;
      throw this.notFinite(number, start);
    }
    const word = this.found(start);
    if (infinite.test(word)) throw this.notFinite(word, start);
    this.at += word.length;
    if (word === 'true') return true;
    if (word === 'false') return false;
    if (word === 'null') return null;
    this.at = start;
    throw this.invalid(
      'a value was expected',
      'a number, a text in double quotes, true, false, null, a list or an object',
    );
  }

  private deeper(): void {
    if (this.path.length >= deepest) {
      const found = { value: `more than ${deepest} levels`, allowed: `at most ${deepest} levels` };
      throw this.unreadable('JSON_TOO_DEEP', `${this.place()}: nested too deep`, found);
    }
    this.at += 1;
  }

  /** Steps over the character if it comes next, blanks before it included. */
  private next(character: string): boolean {
    this.blank();
    if (this.text[this.at] !== character) return false;
    this.at += 1;
    return true;
  }

  private blank(): void {
    for (; this.at < this.text.length; this.at += 1) {
      const code = this.text.charCodeAt(this.at);
      if (code !== 0x20 && code !== 0x0a && code !== 0x0d && code !== 0x09) return;
    }
  }

  private found(at: number): string {
    wordShape.lastIndex = at;
    return wordShape.exec(this.text)?.[0] ?? this.text.slice(at, at + 1);
  }

  private place(at = this.at): string {
    if (at < this.line.start) this.line = { number: 1, start: 0 };
    for (;;) {
      const end = this.text.indexOf('\n', this.line.start);
      if (end === -1 || end >= at) break;
      this.line = { number: this.line.number + 1, start: end + 1 };
    }
    return `line ${this.line.number}, column ${at - this.line.start + 1}`;
  }

  private invalid(problem: string, allowed: string): Unreadable {
    const found =
      this.text[this.at] === '"' ? this.text.slice(this.at, this.at + 20) : this.found(this.at);
    const value = this.at >= this.text.length ? 'the end of the text' : shortened(found, 20);
    return this.unreadable('JSON_INVALID', `${this.place()}: ${problem}`, { value, allowed });
  }

  private notFinite(found: string, start: number): Unreadable {
    const problem = `${this.place(start)}: numbers must be finite`;
    const value = shortened(found);
    return this.unreadable('JSON_NOT_FINITE', problem, { value, allowed: 'a finite number' });
  }

  private unreadable(
    code: FaultCode,
    problem: string,
    rest: Pick<Fault, 'value' | 'allowed'>,
  ): Unreadable {
    return new Unreadable(this.fault(code, problem, rest));
  }

  private fault(code: FaultCode, problem: string, rest: Pick<Fault, 'value' | 'allowed'>): Fault {
    return { code, path: pathText(this.path), problem, ...rest };
  }
}
