import type { CancelToken } from '../../shared/contracts/reader';
import { Cancelled } from '../../shared/errors/problem';

/**
 * Lets one macrotask pass, so that a cancel message can arrive, then throws `Cancelled` if it did. A message channel
 * is used because browsers hold nested timers back by 4 ms, which would cost a third of the reading time.
 */
export async function passTurn(token: CancelToken): Promise<void> {
  await new Promise<void>((resolve) => {
    const channel = new MessageChannel();
    channel.port1.onmessage = () => {
      channel.port1.close();
      resolve();
    };
    channel.port2.postMessage(null);
  });
  if (token.cancelled) throw new Cancelled();
}
