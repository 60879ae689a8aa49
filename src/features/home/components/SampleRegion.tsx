import { useQuery } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import { bytesWords } from '../../../components/output/reading-words';
import { LinkRow } from '../../../components/page/LinkRow';
import { Loaded } from '../../../components/page/Loaded';
import { Region } from '../../../components/page/Page';
import { buttonClass } from '../../../components/ui/Button';
import { samplesQuery } from '../../../lib/query/samples';
import { studyName } from '../../../lib/study-names';
import { orderSamples, type SampleEntry } from '../model/sample-order';

/** The first click of a new reader: an acquisition that comes with Gemel, opened and run. */
export function SampleRegion() {
  const samples = useQuery(samplesQuery);
  return (
    <Region name="samples" note={samples.data ? `${samples.data.files.length} files` : undefined}>
      <Loaded query={samples} what="the samples">
        {(data) => {
          const [first, ...others] = orderSamples(data);
          if (first === undefined) {
            return (
              <p className="max-w-prose py-3 text-dim">
                The samples are not on this server. Whoever runs it makes them with{' '}
                <code className="font-mono">npm run samples</code>; your own files open without them.
              </p>
            );
          }
          return (
            <>
              <FirstSample entry={first} scenario={data.scenario} />
              <ul aria-label="Other samples" className="mt-2 grid gap-x-8 border-t xl:grid-cols-2">
                {others.map((entry) => (
                  <LinkRow
                    key={entry.index}
                    to={`/bench?sample=${entry.index}`}
                    name={entry.preset.name}
                    note={`${studyName(entry.preset.study)} · ${bytesWords(entry.bytes)}`}
                  >
                    {entry.shows.join(' ')}
                  </LinkRow>
                ))}
              </ul>
            </>
          );
        }}
      </Loaded>
    </Region>
  );
}

function FirstSample({ entry, scenario }: { entry: SampleEntry; scenario: string }) {
  return (
    <div className="flex flex-wrap items-start gap-x-6 gap-y-3 pt-4 pb-4">
      <Link
        to={`/bench?sample=${entry.index}`}
        className={`${buttonClass('primary', 'md')} h-10 px-5 font-semibold`}
      >
        Open the samples
      </Link>
      <div className="min-w-64 flex-1">
        <p className="font-semibold">
          {entry.preset.name}
          <span className="pl-3 font-mono text-xs font-normal text-dim">
            {studyName(entry.preset.study)} · {bytesWords(entry.bytes)}
          </span>
        </p>
        <p className="mt-0.5 max-w-prose text-dim">{entry.shows.join(' ')}</p>
        {scenario === '' ? null : <p className="mt-1.5 max-w-prose text-xs text-dim">{scenario}</p>}
      </div>
    </div>
  );
}
