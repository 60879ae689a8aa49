import { mayUseBench, useMe, useOwnGroup } from '../../lib/query/me';
import { FileRegion } from './components/FileRegion';
import { PresetRegion } from './components/PresetRegion';
import { ResultRegion } from './components/ResultRegion';
import { SampleRegion } from './components/SampleRegion';
import { SessionRegion } from './components/SessionRegion';

/** Where to start: the samples, one's own sessions, what the group found last. */
export function HomePage() {
  const group = useOwnGroup();
  const { user } = useMe();
  return (
    <>
      <title>Home · Gemel</title>
      <h1 className="sr-only">
        Home of {user.name} in {group.name}
      </h1>
      {mayUseBench(group) ? (
        <div className="grid lg:grid-cols-[3fr_2fr]">
          <div className="min-w-0 lg:min-h-[calc(100dvh-2.75rem)] lg:border-r">
            <SampleRegion />
            <ResultRegion />
          </div>
          <div className="min-w-0">
            <FileRegion />
            <SessionRegion />
            <PresetRegion />
          </div>
        </div>
      ) : (
        <ResultRegion />
      )}
    </>
  );
}
