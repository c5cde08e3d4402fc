import { cpSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** The folder of this checkout. */
export const checkout = fileURLToPath(new URL('../..', import.meta.url));

/** A folder of a test's own, gone when the test is over. */
export class Scratch {
  readonly folder = mkdtempSync(join(tmpdir(), 'heddle-test-'));

  /** Writes files, given by path and content. */
  write(files: Readonly<Record<string, string>>): void {
    for (const [path, content] of Object.entries(files)) {
      const target = join(this.folder, path);
      mkdirSync(dirname(target), { recursive: true });
      writeFileSync(target, content);
    }
  }

  /** Copies files or folders of the checkout to the same place here. */
  borrow(...paths: readonly string[]): void {
    for (const path of paths) {
      cpSync(join(checkout, path), join(this.folder, path), { recursive: true });
    }
  }

  remove(): void {
    rmSync(this.folder, { recursive: true, force: true });
  }
}
