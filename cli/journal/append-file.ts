import { closeSync, fsyncSync, openSync } from 'node:fs';
import { dirname } from 'node:path';
import { makeFolder, notWritable, syncFolder, writeAll } from '../home.js';

/** A file that only grows. What `sync` has returned from is on the disk, also after a power cut. */
export class AppendFile {
  readonly file: string;
  readonly #descriptor: number;
  #open = true;

  /** `goesOn`: the file is there already, and only this program adds to it. Otherwise one of that name is refused: an id is never used twice. */
  constructor(file: string, { goesOn = false } = {}) {
    this.file = file;
    makeFolder(dirname(file));
    try {
      this.#descriptor = openSync(file, goesOn ? 'a' : 'ax', 0o600);
      syncFolder(dirname(file));
    } catch (error) {
      throw notWritable(file, error);
    }
  }

  append(text: string): void {
    try {
      writeAll(this.#descriptor, text);
    } catch (error) {
      throw notWritable(this.file, error);
    }
  }

  sync(): void {
    try {
      fsyncSync(this.#descriptor);
    } catch (error) {
      throw notWritable(this.file, error);
    }
  }

  close(): void {
    if (!this.#open) return;
    this.#open = false;
    closeSync(this.#descriptor);
  }
}
