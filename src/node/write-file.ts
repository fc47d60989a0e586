import { rename, rm, writeFile } from 'node:fs/promises';
import { LeadspanError } from '../base/errors.ts';

/**
 * Writes a file whole or not at all: to a neighbour first, then renamed over the target, so that an
 * interruption leaves no partial file.
 * @throws LeadspanError BAD_INPUT when the place cannot be written
 */
export async function writeWhole(file: string, text: string): Promise<void> {
  const draft = `${file}.${process.pid}.part`;
  try {
    await writeFile(draft, text);
    await rename(draft, file);
  } catch (cause) {
    await rm(draft, { force: true });
    throw new LeadspanError('BAD_INPUT', `${file} cannot be written: ${(cause as Error).message}.`, {
      field: 'output',
      cause,
    });
  }
}
