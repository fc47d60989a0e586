import { access, constants } from 'node:fs/promises';
import { dirname, resolve } from 'node:path';
import { LeadspanError } from '../base/errors.ts';

/**
 * Finds out before a long job whether its output files can be written.
 * @throws LeadspanError BAD_OPTION naming the option
 */
export async function requireWritable(option: string, file: string | undefined): Promise<void> {
  if (file === undefined || file === '-') return;
  const folder = dirname(resolve(file));
  try {
    await access(folder, constants.W_OK);
  } catch (cause) {
    throw new LeadspanError(
      'BAD_OPTION',
      `--${option} ${file}: the folder ${folder} does not exist or cannot be written.`,
      {
        field: option,
        cause,
      },
    );
  }
}
