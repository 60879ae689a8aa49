import { spawn } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import type { NodeEngine } from '../../workers/entries/node-engine';
import { runVerb } from '../../workers/entries/verbs/dispatch';

const root = fileURLToPath(new URL('../../', import.meta.url));

export interface Answer {
  code: number | null;
  stdout: string;
  stderr: string;
}

/** A verb in this process, on an engine that is already running: what the process would print and answer. */
export async function verb(args: readonly string[], engine: NodeEngine): Promise<Answer> {
  const answer: Answer = { code: null, stdout: '', stderr: '' };
  answer.code = await runVerb(args, {
    out: {
      json: async (value) => {
        answer.stdout += `${JSON.stringify(value)}\n`;
      },
      say: (line) => {
        answer.stderr += `${line}\n`;
      },
    },
    open: () => engine,
    token: { cancelled: false },
  });
  return answer;
}

/** The command line as `npm run gemel` starts it. `onStderr` may interrupt it. */
export function gemel(
  args: readonly string[],
  onStderr?: (text: string, interrupt: () => void) => void,
): Promise<Answer> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, ['workers/entries/start.mjs', ...args], {
      cwd: root,
      env: { PATH: process.env.PATH },
    });
    let stdout = '';
    let stderr = '';
    child.stdout.on('data', (chunk: Buffer) => (stdout += chunk.toString()));
    child.stderr.on('data', (chunk: Buffer) => {
      stderr += chunk.toString();
      onStderr?.(stderr, () => child.kill('SIGINT'));
    });
    child.once('error', reject);
    child.once('close', (code) => resolve({ code, stdout, stderr }));
  });
}
