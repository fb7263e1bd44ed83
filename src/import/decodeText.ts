/**
 * Bytes of a track file to text, chunk by chunk: gzip is inflated, byte-order marks decide the encoding, everything
 * else is UTF-8. What is clearly another kind of file is refused by its first bytes.
 */

import { isAscii } from 'node:buffer';
import { pipeline, Readable } from 'node:stream';
import { createGunzip } from 'node:zlib';
import { tableError } from './tableError.js';

/** One file of tracks: its name, for messages and prefixes, and its bytes. */
export interface TrackSource {
  readonly name: string;
  readonly chunks: AsyncIterable<Uint8Array>;
}

/** Thrown behind the last readable character; the reader of lines knows which line that is. */
export class UndecodableText extends Error {
  readonly encoding: string;

  constructor(encoding: string) {
    super(`not ${encoding} text`);
    this.encoding = encoding;
  }
}

const LARGEST_PIECE = 1 << 18; // bytes decoded at once: rows of one piece live and die together
const SNIFFED_BYTES = 6;

const PARQUET = [0x50, 0x41, 0x52, 0x31];

/** First bytes of what people mistake for a table, with the sentence that helps them on. */
const FOREIGN_FORMATS: readonly (readonly [readonly number[], string])[] = [
  [[0x50, 0x4b, 0x03, 0x04], 'this is a zip archive or a spreadsheet workbook; export the sheet as CSV'],
  [[0xd0, 0xcf, 0x11, 0xe0], 'this is a spreadsheet workbook; export the sheet as CSV'],
  [PARQUET, 'this is a Parquet file inside gzip; unpack it first'],
  [[0x89, 0x48, 0x44, 0x46], 'this is an HDF5 file; export the positions as CSV'],
  [[0x42, 0x5a, 0x68], 'this is compressed by bzip2; unpack it first, or use gzip'],
  [[0xfd, 0x37, 0x7a, 0x58, 0x5a], 'this is compressed by xz; unpack it first, or use gzip'],
  [[0x28, 0xb5, 0x2f, 0xfd], 'this is compressed by zstd; unpack it first, or use gzip'],
  [[0xff, 0xfe, 0x00, 0x00], 'this is UTF-32 text; save it as UTF-8'],
  [[0x00, 0x00, 0xfe, 0xff], 'this is UTF-32 text; save it as UTF-8'],
];

function startsWith(bytes: Uint8Array, signature: readonly number[]): boolean {
  return bytes.length >= signature.length && signature.every((byte, i) => bytes[i] === byte);
}

/** Whether a file is a Parquet file, by its first bytes. */
export function isParquet(bytes: Uint8Array): boolean {
  return startsWith(bytes, PARQUET);
}

/** The same bytes with the first chunk long enough to be recognised (or the file at its end). */
export async function* joinFirstBytes(chunks: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let head: Uint8Array | null = new Uint8Array(0);
  for await (const chunk of chunks) {
    if (head === null) {
      yield chunk;
    } else {
      head = Buffer.concat([head, chunk]);
      if (head.length < SNIFFED_BYTES) continue;
      yield head;
      head = null;
    }
  }
  if (head !== null && head.length > 0) yield head;
}

async function* inflate(
  first: Uint8Array,
  rest: AsyncGenerator<Uint8Array>,
  file: string,
): AsyncGenerator<Uint8Array> {
  const packed = async function* (): AsyncGenerator<Uint8Array> {
    yield first;
    yield* rest;
  };
  const gunzip = createGunzip({ chunkSize: LARGEST_PIECE });
  pipeline(Readable.from(packed()), gunzip, () => undefined); // errors arrive through the loop below
  try {
    for await (const chunk of gunzip as AsyncIterable<Uint8Array>) yield chunk;
  } catch (error) {
    const code = error instanceof Error && 'code' in error ? String(error.code) : '';
    if (!code.startsWith('Z_')) throw error;
    throw tableError({ file }, 'the gzip data are damaged or cut short; copy or pack the file again');
  }
}

/**
 * The text of one source in pieces of at most LARGEST_PIECE bytes, without byte-order mark, line endings untouched.
 *
 * @throws DataError  another file format, damaged gzip data
 * @throws UndecodableText  bytes that are not text of the encoding; all text before them has been yielded
 */
export async function* decodeText(source: TrackSource): AsyncGenerator<string> {
  const chunks = joinFirstBytes(source.chunks);
  try {
    const first = await chunks.next();
    if (first.done) return;
    if (!startsWith(first.value, [0x1f, 0x8b])) {
      yield* decodeChunks(first.value, chunks, source.name);
      return;
    }
    const inflated = joinFirstBytes(inflate(first.value, chunks, source.name));
    const head = await inflated.next();
    if (!head.done) yield* decodeChunks(head.value, inflated, source.name);
  } finally {
    await chunks.return(undefined); // closes the source where reading ended early
  }
}

async function* decodeChunks(
  first: Uint8Array,
  rest: AsyncGenerator<Uint8Array>,
  file: string,
): AsyncGenerator<string> {
  for (const [signature, sentence] of FOREIGN_FORMATS) {
    if (startsWith(first, signature)) throw tableError({ file }, sentence);
  }
  let encoding = 'utf-8';
  let mark = 0;
  if (startsWith(first, [0xef, 0xbb, 0xbf])) mark = 3;
  else if (startsWith(first, [0xff, 0xfe])) [encoding, mark] = ['utf-16le', 2];
  else if (startsWith(first, [0xfe, 0xff])) [encoding, mark] = ['utf-16be', 2];
  const decoder = new TextDecoder(encoding, { fatal: true, ignoreBOM: true });
  let pending = false; // the decoder may hold the beginning of a character

  const decode = function* (chunk: Uint8Array): Generator<string> {
    for (let start = 0; start < chunk.length; start += LARGEST_PIECE) {
      const piece = chunk.subarray(start, start + LARGEST_PIECE);
      if (encoding === 'utf-8' && !pending && isAscii(piece)) {
        // The usual file: one-byte strings, made without looking at each byte in turn.
        yield Buffer.from(piece.buffer, piece.byteOffset, piece.byteLength).toString('latin1');
        continue;
      }
      let text: string;
      try {
        text = decoder.decode(piece, { stream: true });
      } catch {
        const readable = new TextDecoder(encoding, { ignoreBOM: true }).decode(piece);
        yield readable.slice(0, Math.max(0, readable.indexOf('\uFFFD')));
        throw new UndecodableText(encoding.toUpperCase());
      }
      pending = encoding !== 'utf-8' || piece[piece.length - 1] >= 0x80;
      yield text;
    }
  };
  yield* decode(first.subarray(mark));
  for await (const chunk of rest) yield* decode(chunk);
  try {
    decoder.decode();
  } catch {
    throw new UndecodableText(encoding.toUpperCase());
  }
}
