import { readFile } from 'node:fs/promises';
import { join, resolve, sep } from 'node:path';
import { Problem } from '../../shared/errors/problem';

/** The tracked sample acquisitions: a folder with manifest.json, files and presets. */
export interface SampleStore {
  root: string;
  /** Parsed JSON of a file of the folder, or null when there is none. */
  readJson(name: string): Promise<unknown>;
}

export function createSampleStore(folder: string): SampleStore {
  const root = resolve(folder);
  return {
    root,
    async readJson(name) {
      const path = resolve(join(root, name));
      if (!path.startsWith(root + sep)) {
        throw new Problem('bad-input', `The samples name ${name}, which is outside their folder.`, name);
      }
      let text: string;
      try {
        text = await readFile(path, 'utf8');
      } catch (error) {
        if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return null;
        throw error;
      }
      try {
        return JSON.parse(text);
      } catch (error) {
        throw new Problem('unreadable', `The sample file ${name} is not JSON: ${String(error)}.`, name);
      }
    },
  };
}
