import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';

/**
 * What a checkout lacks before it can run. Only questions are answered here; nothing is changed.
 */

/** Written by npm when an install is complete, so an install that was cut short has none. */
export const installMark = join('node_modules', '.package-lock.json');

/** Names the kind of machine that packages were installed for: some of them are compiled. */
export const machineMark = join('node_modules', '.installed-for');

/** The kind of machine this is. */
export const machine = `${process.platform}-${process.arch}`;

/** Written when a build is complete: the digest of what it was built from. */
export const buildMark = join('dist', '.built-from');

const buildInputs = ['src', 'workers', 'tsconfig.json', 'tsconfig.build.json', 'package-lock.json'];

/**
 * Whether a Node version is at least the one that package.json asks for.
 *
 * @param {string} version  such as 20.19.0
 * @param {string} range  of the form >=major.minor
 * @returns {boolean}
 */
export function isNodeRecent(version, range) {
  const wanted = /^>=(\d+)\.(\d+)$/.exec(range);
  const found = /^(\d+)\.(\d+)\./.exec(version);
  if (!wanted || !found) return false;
  const major = Number(found[1]) - Number(wanted[1]);
  return major > 0 || (major === 0 && Number(found[2]) >= Number(wanted[2]));
}

/**
 * Whether packages must be installed: never done, cut short, done for an older lock file, or done
 * for another kind of machine that shares the folder (a container, say).
 *
 * @param {string} root  folder of the checkout
 * @returns {boolean}
 */
export function needsInstall(root) {
  const mark = join(root, installMark);
  if (!existsSync(mark)) return true;
  const installedFor = join(root, machineMark);
  if (existsSync(installedFor) && readFileSync(installedFor, 'utf8') !== machine) return true;
  return statSync(mark).mtimeMs < statSync(join(root, 'package-lock.json')).mtimeMs;
}

/**
 * Whether the build is absent, was cut short, or comes from other sources than those at hand.
 *
 * @param {string} root  folder of the checkout
 * @returns {boolean}
 */
export function needsBuild(root) {
  const mark = join(root, buildMark);
  return !existsSync(mark) || readFileSync(mark, 'utf8') !== digestSources(root);
}

/**
 * One digest of the path and content of everything the build is made from.
 *
 * @param {string} root  folder of the checkout
 * @returns {string} SHA-256, hexadecimal
 */
export function digestSources(root) {
  const digest = createHash('sha256');
  for (const path of buildInputs.flatMap((input) => listFiles(root, input))) {
    const content = readFileSync(join(root, path));
    digest.update(`${path}\0${content.length}\0`).update(content);
  }
  return digest.digest('hex');
}

/**
 * Every file at or below a path, in one order on every machine; none when there is nothing.
 *
 * @param {string} root  folder of the checkout
 * @param {string} path  relative to the root
 * @returns {string[]} paths relative to the root, with forward slashes
 */
export function listFiles(root, path) {
  if (!existsSync(join(root, path))) return [];
  if (!statSync(join(root, path)).isDirectory()) return [path];
  return readdirSync(join(root, path))
    .sort()
    .flatMap((name) => listFiles(root, `${path}/${name}`));
}
