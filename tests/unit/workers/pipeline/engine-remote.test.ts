import * as Comlink from 'comlink';
import { describe, expect, it } from 'vitest';
import type { EngineHost, RunRequest } from '../../../../shared/contracts/engine';
import type { MapData, StudyOutput } from '../../../../shared/contracts/output';
import { ownArrays, withTransfers } from '../../../../workers/pipeline/engine-remote';

const shared = new Float64Array([0, 1, 2, 3, 4, 5]);

const map: MapData = {
  label: 'Singles',
  shape: [2, 2],
  axes: [
    { label: 'x', unit: 'um', start: 0, step: 1 },
    { label: 'y', unit: 'um', start: 0, step: 1 },
  ],
  unit: 'counts',
  scale: 'counts',
  // A view into counts that the engine goes on using.
  data: shared.subarray(1, 5),
  masked: Uint8Array.of(0, 1, 0, 0),
};

const output: StudyOutput = {
  study: 'delay',
  quantities: {},
  verdicts: {},
  checks: [],
  maps: { singles: map },
  chosen: {},
  statement: '',
};

const provenance = { inputs: [], dials: {}, engine: '0', seed: 1, startedAt: '', seconds: 1 };

function hostOf(): EngineHost {
  return {
    attach: async () => undefined,
    studies: async () => [],
    inspect: async () => ({ status: 'cancelled' }),
    cancel: async () => undefined,
    run: async ({ jobId }, onEvent) => {
      await onEvent({ kind: 'partial', jobId, output, fraction: 0.5 });
      return { status: 'ok', value: { output, provenance } };
    },
  };
}

describe('the engine at the end of the line', () => {
  it('sends maps of its own, so that the counts behind them stay whole', () => {
    const sent = ownArrays(output).maps.singles!;
    expect(sent).toEqual({ ...map, data: Float64Array.of(1, 2, 3, 4) });
    expect(sent.data.buffer.byteLength).toBe(32);
    expect(sent.masked).not.toBe(map.masked);
    expect('sigma' in sent).toBe(false);
  });

  it('transfers them, with the answer and with every look before it', async () => {
    const { port1, port2 } = new MessageChannel();
    const posted: Transferable[][] = [];
    const post = port1.postMessage.bind(port1);
    port1.postMessage = (message: unknown, moved?: Transferable[] | StructuredSerializeOptions) => {
      if (Array.isArray(moved)) posted.push(moved);
      post(message, moved as Transferable[]);
    };
    Comlink.expose(withTransfers(hostOf()), port1);
    const remote = Comlink.wrap<EngineHost>(port2);
    const seen: number[][] = [];
    const request: RunRequest = { jobId: 'j', study: 'delay', inputs: {}, dials: {}, seed: 1 };
    const outcome = await remote.run(
      request,
      Comlink.proxy((event) => {
        if (event.kind === 'partial') seen.push([...event.output.maps.singles!.data]);
      }),
    );
    expect(seen).toEqual([[1, 2, 3, 4]]);
    expect(outcome.status === 'ok' && [...outcome.value.output.maps.singles!.data]).toEqual([1, 2, 3, 4]);
    // The answer moved both arrays of its map; the counts are untouched.
    expect(posted.at(-1)).toHaveLength(2);
    expect([...shared]).toEqual([0, 1, 2, 3, 4, 5]);
    port1.close();
    port2.close();
  });
});
