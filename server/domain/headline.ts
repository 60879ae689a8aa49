import type { ResultSummary } from '../../shared/contracts/http';
import type { ResultFile } from '../../shared/contracts/result';

/** What a colleague asks first of each study; an entry also stands for ids that continue it with a dot. */
const asked: Record<string, readonly string[]> = {
  delay: ['car', 'coincidences.net', 'delay.sigma'],
  'joint-map': ['width.x.minus', 'width.x.plus', 'width.y.minus'],
  witness: ['reid.xy.net', 'reid.x.net', 'entropic.steering.xy.net', 'entropic.steering.x.net', 'schmidt'],
  'ghost-image': ['cnr', 'visibility', 'edge.width'],
};
const most = 3;

/** Up to three quantities for the list of results: those asked first, then in the order of the file. */
export function pickHeadline(file: ResultFile): ResultSummary['headline'] {
  const ids = Object.keys(file.quantities);
  const preferred = (asked[file.study] ?? []).flatMap((want) => {
    const id = ids.find((candidate) => candidate === want || candidate.startsWith(`${want}.`));
    return id === undefined ? [] : [id];
  });
  const chosen = [...new Set([...preferred, ...ids])].slice(0, most);
  return chosen.map((id) => {
    const { value, sigma, unit } = file.quantities[id]!;
    return { id, value, sigma, unit };
  });
}
