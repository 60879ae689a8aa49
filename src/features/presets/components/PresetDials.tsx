import { useQuery } from '@tanstack/react-query';
import type { Preset } from '../../../../shared/contracts/preset';
import { Loaded } from '../../../components/page/Loaded';
import { Table, Td, Th } from '../../../components/ui/Table';
import { studiesQuery } from '../../../lib/query/studies';
import { describeDials } from '../model/describe-dial';

/** Every dial of the study with what this preset sets, in words. */
export function PresetDials({ preset }: { preset: Preset }) {
  const studies = useQuery(studiesQuery);
  return (
    <Loaded query={studies} what="the dials of the study">
      {(infos) => {
        const specs = infos.find((info) => info.id === preset.study)?.dials ?? [];
        const dials = describeDials(preset.dials, specs);
        if (dials.length === 0) return <p className="py-3 text-dim">This study has no dials.</p>;
        return (
          <Table label="Dials of the preset">
            <thead>
              <tr>
                <Th>dial</Th>
                <Th numeric>value</Th>
                <Th>why</Th>
              </tr>
            </thead>
            <tbody>
              {dials.map((dial) => (
                <tr key={dial.id} className="border-b border-line">
                  <Td className="py-1.5 whitespace-nowrap">{dial.label}</Td>
                  <Td numeric className={dial.changed ? '' : 'text-dim'}>
                    {dial.changed ? (
                      <span className="border-b border-signal">
                        {dial.value}
                        <span className="sr-only"> (set by this preset)</span>
                      </span>
                    ) : (
                      dial.value
                    )}
                  </Td>
                  <Td className="max-w-prose text-xs text-dim">{dial.reason}</Td>
                </tr>
              ))}
            </tbody>
          </Table>
        );
      }}
    </Loaded>
  );
}
