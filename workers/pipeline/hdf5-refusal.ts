import { Problem } from '../../shared/errors/problem';

/** Opens a file of the HDF5 library, or says why it would not. It used to answer -1 where it now throws: both count. */
export function openOrRefuse<T extends { file_id: bigint }>(open: () => T, name: string): T {
  try {
    const file = open();
    if (file.file_id >= 0n) return file;
  } catch (thrown) {
    throw refusal(name, thrown instanceof Error ? thrown.message : String(thrown));
  }
  throw refusal(name, 'no file was opened');
}

function refusal(name: string, text: string): Problem {
  const causes = [...text.matchAll(/#\d+: .*?\(\): (.+)/g)];
  const detail = causes.at(-1)?.[1]?.trim() ?? text.split('\n', 1)[0];
  return new Problem(
    'unreadable',
    `${name} begins like HDF5 but the library cannot open it (${detail}); it is damaged or still being written, copy it again from where it was written.`,
    name,
  );
}
