import * as Comlink from 'comlink';
import type { EngineHost, OnRunEvent, RunEvent } from '../../shared/contracts/engine';
import type { MapData, StudyOutput } from '../../shared/contracts/output';
import { transferablesOf } from '../accumulators/transferables';

/**
 * The engine at the page's end of the line. Maps go by transfer: cloning them would cost the page's own thread as long as
 * copying takes. What is sent is a copy made here, because the counts they were finished from go on being used.
 */
export function withTransfers(host: EngineHost): EngineHost {
  return {
    ...host,
    async run(request, onEvent) {
      const outcome = await host.run(request, (event) => tell(onEvent, event));
      if (outcome.status !== 'ok') return outcome;
      const output = ownArrays(outcome.value.output);
      return Comlink.transfer(
        { ...outcome, value: { ...outcome.value, output } },
        transferablesOf(output.maps),
      );
    },
  };
}

function tell(onEvent: OnRunEvent, event: RunEvent): void | Promise<void> {
  if (event.kind !== 'partial') return onEvent(event);
  const output = ownArrays(event.output);
  return onEvent(Comlink.transfer({ ...event, output }, transferablesOf(output.maps)));
}

/** The output with arrays that nothing else holds. */
export function ownArrays(output: StudyOutput): StudyOutput {
  const maps = Object.entries(output.maps).map(([id, map]) => [id, ownMap(map)] as const);
  return { ...output, maps: Object.fromEntries(maps) };
}

function ownMap(map: MapData): MapData {
  const { masked, sigma, model } = map;
  return {
    ...map,
    data: map.data.slice(),
    ...(masked === undefined ? {} : { masked: masked.slice() }),
    ...(sigma === undefined ? {} : { sigma: sigma.slice() }),
    ...(model === undefined ? {} : { model: model.slice() }),
  };
}
