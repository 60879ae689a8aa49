import { Tabs } from 'radix-ui';
import type { StudyInfo } from '../../../../shared/contracts/study';
import { useBench, useBenchState } from './bench-context';

const ORDER = ['delay', 'joint-map', 'witness', 'ghost-image'];

function inOrder(studies: readonly StudyInfo[]): StudyInfo[] {
  return [...studies].sort((a, b) => ORDER.indexOf(a.id) - ORDER.indexOf(b.id));
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
      className="flex shrink-0 items-stretch"
      onValueChange={(value) => {
        const next = studies.find(({ id }) => id === value);
        if (next !== undefined) store.getState().chooseStudy(next.id);
      }}
    >
      <Tabs.List aria-label="Study" className="flex items-stretch gap-4">
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
