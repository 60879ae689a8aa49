import { Tabs } from 'radix-ui';
import { type StudyInfo, studyIds } from '../../../../shared/contracts/study';
import { useBench, useBenchState } from './bench-context';

/** In the order of the list of studies; one it does not name comes last. */
export function inOrder(studies: readonly StudyInfo[]): StudyInfo[] {
  const rank = ({ id }: StudyInfo): number => {
    const place = studyIds.indexOf(id);
    return place < 0 ? studyIds.length : place;
  };
  return [...studies].sort((a, b) => rank(a) - rank(b));
}

/** One kind of analysis at a time. Radix's tabs give the arrow keys. */
export function StudyPicker() {
  const studies = useBenchState((state) => state.studies);
  const study = useBenchState((state) => state.study);
  const { store } = useBench();
  return (
    <Tabs.Root
      value={study}
      activationMode="manual"
      className="flex min-h-9 max-w-full items-stretch"
      onValueChange={(value) => {
        const next = studies.find(({ id }) => id === value);
        if (next !== undefined) store.getState().chooseStudy(next.id);
      }}
    >
      <Tabs.List aria-label="Study" className="flex flex-wrap items-stretch gap-x-4">
        {inOrder(studies).map(({ id, label }) => (
          <Tabs.Trigger
            key={id}
            value={id}
            aria-controls="bench-stage"
            className="-mb-px border-b-2 border-transparent px-0.5 py-1.5 text-sm whitespace-nowrap text-dim hover:text-text data-[state=active]:border-text data-[state=active]:text-text"
          >
            {label}
          </Tabs.Trigger>
        ))}
      </Tabs.List>
    </Tabs.Root>
  );
}
