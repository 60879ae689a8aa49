import type { InputSetting, Preset } from '../../../../shared/contracts/preset';
import { describeDetector, describeLayout, describePlane } from '../../../components/output/input-words';
import { type Fact, Facts, Lines } from '../../../components/page/Facts';

const PROPOSED = <span className="text-dim">proposed from the bytes</span>;

function factsOf({ layout, detector, plane }: InputSetting): Fact[] {
  return [
    { name: 'layout', value: layout === null ? PROPOSED : <Lines lines={describeLayout(layout)} /> },
    {
      name: 'detector map',
      value: detector === null ? PROPOSED : <Lines lines={describeDetector(detector)} />,
    },
    ...(plane === null ? [] : [{ name: 'plane', value: <Lines lines={describePlane(plane)} /> }]),
  ];
}

export function PresetInputs({ preset }: { preset: Preset }) {
  const inputs = Object.entries(preset.inputs);
  if (inputs.length === 0) {
    return (
      <p className="py-3 text-dim">
        It says nothing about its files: layouts and detector maps are proposed from the bytes when they are
        opened.
      </p>
    );
  }
  return inputs.map(([name, setting]) => (
    <section key={name} aria-label={name} className="border-b border-line pt-2 last:border-b-0">
      <h3 className="font-semibold">{name}</h3>
      <Facts facts={factsOf(setting)} />
    </section>
  ));
}
