import { closeSync, fsyncSync, openSync, writeSync } from 'node:fs';
import { dirname } from 'node:path';
import { makeFolder, notWritable, syncFolder } from '../home.js';

/** A file that only grows. What `sync` has returned from is on the disk, also after a power cut. */
export class AppendFile {
  readonly file: string;
  readonly #descriptor: number;
  #open = true;

  constructor(file: string) {
    this.file = file;
    makeFolder(dirname(file));
    try {
      // 'ax' would refuse a second run with the same id; an id is never used twice.
      this.#descriptor = openSync(file, 'ax', 0o600);
      syncFolder(dirname(file));
    } catch (error) {
      throw notWritable(file, error);
    }
  }

  append(text: string): void {
    try {
      writeSync(this.#descriptor, text);
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
