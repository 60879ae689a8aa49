import { type Scenario, scenarioSchema } from '../../shared/contracts/scenario';
import { Problem } from '../../shared/errors/problem';

/**
 * A scenario from outside, checked and with its defaults filled in.
 * @throws Problem `bad-input` or `newer-version`, with the field as its place.
 */
export function parseScenario(value: unknown): Scenario {
  refuseNewer(value);
  const parsed = scenarioSchema.safeParse(value);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  const place = issue?.path.join('.') || 'scenario';
  throw new Problem(
    'bad-input',
    `The scenario is wrong at ${place}: ${issue?.message ?? 'unknown'}; correct it there.`,
    place,
  );
}

function refuseNewer(value: unknown): void {
  if (typeof value !== 'object' || value === null || !('version' in value)) return;
  if (typeof value.version === 'number' && value.version > 1) {
    throw new Problem(
      'newer-version',
      `The scenario has version ${value.version}, this engine knows version 1; use a newer engine.`,
      'version',
    );
  }
}
