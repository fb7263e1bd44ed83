/** Reading documents, and writing files whole or not at all. */

import {
  accessSync,
  closeSync,
  constants,
  createReadStream,
  mkdirSync,
  openSync,
  realpathSync,
  rmSync,
  statSync,
  type Stats,
} from 'node:fs';
import { open, readFile, rename, rm } from 'node:fs/promises';
import { basename, dirname, join } from 'node:path';
import { UsageError } from '../errors.js';
import { hold, release } from './unfinishedFiles.js';

/** Why a system call failed, in words. */
export function explainSystemError(error: unknown): string {
  const code = (error as NodeJS.ErrnoException | null)?.code ?? '';
  const words: Record<string, string> = {
    ENOENT: 'there is no such file',
    ENOTDIR: 'part of the path is a file, not a directory',
    EISDIR: 'it is a directory',
    EEXIST: 'there is a file of that name',
    EACCES: 'permission is denied',
    EPERM: 'permission is denied',
    EROFS: 'the file system is read-only',
    ENOSPC: 'there is no space left',
    ENAMETOOLONG: 'the name is too long',
    ELOOP: 'its links go in a circle',
    EMFILE: 'too many files are open',
  };
  return words[code] ?? (error instanceof Error ? error.message.split('\n')[0] : String(error));
}

/**
 * The JSON of a study, fit, scenario or other document, without the `$schema` that editors look for.
 *
 * @param kind  what it should be, for the sentence: `fit file`
 * @throws UsageError  where it cannot be read or is not UTF-8 text
 */
export async function readDocument(path: string, kind: string, shown: string): Promise<unknown> {
  let bytes: Uint8Array;
  try {
    bytes = await readFile(path);
  } catch (error) {
    throw new UsageError(`${kind} ${shown} cannot be read: ${explainSystemError(error)}`, { path, kind });
  }
  try {
    const text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
    const value = JSON.parse(text) as unknown;
    if (/__proto__|\\u/.test(text)) refusePrototypes(value, kind, shown);
    if (typeof value === 'object' && value !== null && !Array.isArray(value))
      Reflect.deleteProperty(value, '$schema');
    return value;
  } catch (error) {
    if (error instanceof UsageError) throw error;
    const reason = error instanceof SyntaxError ? firstSentence(error.message) : 'it is not text';
    throw new UsageError(`${shown} is not a ${kind}: it does not hold JSON (${reason})`, { path, kind });
  }
}

/** `__proto__` names no field of any document; readers of JSON differ in what they make of it. */
function refusePrototypes(value: unknown, kind: string, shown: string): void {
  if (typeof value !== 'object' || value === null) return;
  if (Object.hasOwn(value, '__proto__')) {
    throw new UsageError(`${shown}: "__proto__" is not a key of a ${kind}; remove it`, { kind });
  }
  for (const part of Object.values(value)) refusePrototypes(part, kind, shown);
}

function firstSentence(message: string): string {
  return message.split('\n')[0].replace(/, "?.*is not valid JSON$/s, '');
}

/** The bytes of a file, piece by piece. */
export function readChunks(path: string): AsyncIterable<Uint8Array> {
  return createReadStream(path, { highWaterMark: 1 << 20 });
}

/**
 * Refuses an output that could not be written, or that is one of the inputs, before any long work starts.
 *
 * @param inputs  absolute paths of what the command reads
 * @param option  the one that names the output
 * @throws UsageError
 */
export function checkOutput(
  path: string,
  shown: string,
  inputs: readonly string[] = [],
  option = '-o',
): void {
  const refuse = (reason: string): never => {
    throw new UsageError(`${shown} cannot be written: ${reason}; give another place with ${option}`, {
      path,
    });
  };
  const target = statOrNull(path);
  if (target?.isDirectory()) refuse('it is a directory');
  if (target !== null) {
    const real = realpathSync(path);
    for (const input of inputs) {
      if (statOrNull(input) !== null && realpathSync(input) === real) {
        refuse('the same file is read as input');
      }
    }
    if (!target.isFile()) return; // a device or a pipe: written directly
  }
  const directory = dirname(path);
  const place = statOrNull(directory);
  if (place === null) refuse(`there is no directory ${directory}`);
  if (place !== null && !place.isDirectory()) refuse(`${directory} is not a directory`);
  try {
    accessSync(directory, constants.W_OK);
    if (target !== null) accessSync(path, constants.W_OK);
    probeDirectory(directory, basename(path));
  } catch (error) {
    refuse(explainSystemError(error));
  }
}

/** Some places refuse new files whatever their permissions say (/proc, a full or read-only disk). */
function probeDirectory(directory: string, name: string): void {
  const probe = temporaryPath(directory, name);
  hold(probe);
  try {
    closeSync(openSync(probe, 'wx'));
  } finally {
    rmSync(probe, { force: true });
    release(probe);
  }
}

function temporaryPath(directory: string, name: string): string {
  return join(directory, `.${name.slice(0, 100)}.${process.pid}.part`);
}

function statOrNull(path: string): Stats | null {
  try {
    return statSync(path);
  } catch {
    return null; // not there, or not reachable: opening it says why
  }
}

/**
 * Writes a file whole or not at all: into a temporary file in the same directory, then renamed over the target.
 * Where the writing fails, or a signal ends the program, nothing is left behind and an older file stays as it was.
 *
 * @param content  the text or the bytes, or the pieces of a text
 * @throws UsageError  where the place cannot be written
 */
export async function writeWhole(
  path: string,
  content: string | Uint8Array | Iterable<string> | AsyncIterable<string>,
  shown = path,
): Promise<void> {
  const target = statOrNull(path);
  const direct = target !== null && !target.isFile();
  const final = target !== null && !direct ? realpathSync(path) : path; // a link stays a link
  const temporary = direct ? final : temporaryPath(dirname(final), basename(final));
  if (!direct) hold(temporary);
  try {
    const handle = await guard(() => open(temporary, 'w'));
    try {
      const whole = typeof content === 'string' || content instanceof Uint8Array;
      for await (const piece of whole ? [content] : content) {
        await guard(() => handle.appendFile(piece));
      }
      if (!direct) await guard(() => handle.sync());
    } finally {
      await handle.close();
    }
    if (!direct) await guard(() => rename(temporary, final));
  } catch (error) {
    if (!direct) await rm(temporary, { force: true }).catch(() => {});
    if (error instanceof WriteFailure) {
      throw new UsageError(
        `${shown} cannot be written: ${explainSystemError(error.cause)}; give another place with -o`,
        { path },
      );
    }
    throw error;
  } finally {
    release(temporary);
  }
}

/**
 * Makes a directory, with those above it, where there is none.
 *
 * @throws UsageError  where it cannot be made
 */
export function makeDirectory(path: string, shown: string): void {
  try {
    mkdirSync(path, { recursive: true });
  } catch (error) {
    throw new UsageError(`${shown} cannot be made: ${explainSystemError(error)}; give another place`, {
      path,
    });
  }
}

/** Keeps trouble with the place apart from trouble in making the content. */
class WriteFailure extends Error {}

async function guard<Value>(act: () => Promise<Value>): Promise<Value> {
  try {
    return await act();
  } catch (cause) {
    throw new WriteFailure('write', { cause });
  }
}
