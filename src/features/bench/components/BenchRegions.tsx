import type { ReactNode } from 'react';
import { Group, Panel, Separator, useDefaultLayout } from 'react-resizable-panels';
import { readSetting, writeSetting } from '../../../lib/settings';
import { useMedia } from '../../../lib/use-media';

const storage = { getItem: readSetting, setItem: writeSetting };

export interface BenchRegionsProps {
  shelf: ReactNode;
  stage: ReactNode;
  dials: ReactNode;
  ledger: ReactNode;
}

/** Under this there is no room for three columns: one column that scrolls then, without borders to move. */
const NARROW = '(max-width: 56.24rem)';

export function BenchRegions(props: BenchRegionsProps) {
  return useMedia(NARROW) ? <Stacked {...props} /> : <Panels {...props} />;
}

function Stacked({ shelf, stage, dials, ledger }: BenchRegionsProps) {
  return (
    <div className="min-h-0 flex-1 divide-y divide-line overflow-y-auto" data-testid="bench-stacked">
      {/* Each as high as what it holds: a region of the height of the window would scroll inside the one that scrolls. */}
      <div>{shelf}</div>
      <div>{stage}</div>
      <div>{dials}</div>
      <div>{ledger}</div>
    </div>
  );
}

/** Four regions with borders that move, by hand or by arrow keys, and stay where they were put. */
function Panels({ shelf, stage, dials, ledger }: BenchRegionsProps) {
  const rows = useDefaultLayout({ id: 'bench.rows', panelIds: ['top', 'ledger'], storage });
  const columns = useDefaultLayout({ id: 'bench.columns', panelIds: ['shelf', 'stage', 'dials'], storage });
  return (
    <Group
      orientation="vertical"
      className="min-h-0 flex-1"
      defaultLayout={rows.defaultLayout}
      onLayoutChanged={rows.onLayoutChanged}
    >
      <Panel id="top" minSize={180}>
        <Group
          orientation="horizontal"
          defaultLayout={columns.defaultLayout}
          onLayoutChanged={columns.onLayoutChanged}
        >
          <Panel id="shelf" defaultSize="18%" minSize={170}>
            {shelf}
          </Panel>
          <Separator aria-label="Between shelf and stage" className={BORDER_X} />
          <Panel id="stage" minSize={320}>
            {stage}
          </Panel>
          <Separator aria-label="Between stage and dials" className={BORDER_X} />
          <Panel id="dials" defaultSize="21%" minSize={210}>
            {dials}
          </Panel>
        </Group>
      </Panel>
      <Separator aria-label="Between stage and ledger" className={BORDER_Y} />
      <Panel id="ledger" defaultSize="30%" minSize={90}>
        {ledger}
      </Panel>
    </Group>
  );
}

const BORDER = 'bg-line hover:bg-control focus-visible:bg-focus data-[separator=active]:bg-control';
const BORDER_X = `${BORDER} w-px`;
const BORDER_Y = `${BORDER} h-px`;
