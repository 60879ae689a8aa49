import type { Role, ServerInfo } from '../../shared/contracts/http';
import type { People } from '../data/repositories/people';
import type { Presets } from '../data/repositories/presets';
import type { SampleStore } from '../data/sample-store';
import { parseRole } from './permissions';
import { readSamples } from './samples';

/** The invented group of a server on loopback, and one person for each role. */
const demoGroup = { name: 'Lanternfield pair bench', slug: 'lanternfield' };
/** The group of a server others can reach; real people never share one with the demo people. */
const realGroupSlug = 'our-group';
export const demoPeople: readonly { email: string; name: string; role: Role }[] = [
  { email: 'lead@demo.gemel', name: 'Demo lead', role: 'lead' },
  { email: 'analyst@demo.gemel', name: 'Demo analyst', role: 'analyst' },
  { email: 'runner@demo.gemel', name: 'Demo runner', role: 'runner' },
  { email: 'guest@demo.gemel', name: 'Demo guest', role: 'guest' },
];

export interface SeedStores {
  people: People;
  presets: Presets;
  samples: SampleStore;
  hash(password: string): Promise<string>;
  note(sentence: string): void;
}

/** Known to everybody who ever saw a demo; the e-mail is compared as the sign-in compares it. */
export function isDemoEmail(email: string): boolean {
  const typed = email.trim().toLowerCase();
  return demoPeople.some((person) => person.email === typed);
}

async function ensureGroup(people: People, group: { name: string; slug: string }): Promise<string> {
  const found = await people.groupBySlug(group.slug);
  return found?.id ?? people.createGroup(group.name, group.slug);
}

/** On loopback: the demo people can sign in with this password. May run at every start. */
export async function openDemo(stores: SeedStores, password: string): Promise<ServerInfo['demo']> {
  const groupId = await ensureGroup(stores.people, demoGroup);
  const passwordHash = await stores.hash(password);
  let leadId = '';
  for (const person of demoPeople) {
    const id = await stores.people.admit({ ...person, passwordHash, groupId });
    if (person.role === 'lead') leadId = id;
  }
  await seedPresets(stores, groupId, leadId);
  return { email: demoPeople[0]!.email, password };
}

/** Elsewhere: nobody can sign in as a demo person, even on a data directory that once had the demo open. */
export async function closeDemo(people: People): Promise<void> {
  await people.lockOut(demoPeople.map((person) => person.email));
}

/** Whether anybody but a demo person leads a group. */
export async function hasRealLead(people: People): Promise<boolean> {
  const stored = await people.rolesBeside(demoPeople.map((person) => person.email));
  return stored.some((role) => parseRole(role) === 'lead');
}

/** First start of a server others can reach: one lead, with a password that is shown once. */
export async function admitFirstLead(
  stores: SeedStores,
  groupName: string,
  email: string,
  password: string,
): Promise<void> {
  const groupId = await ensureGroup(stores.people, { name: groupName, slug: realGroupSlug });
  const passwordHash = await stores.hash(password);
  const id = await stores.people.admit({ email, name: email, role: 'lead', passwordHash, groupId });
  await seedPresets(stores, groupId, id);
}

/** Presets of the samples, once: presets cannot be deleted, so none means they were never stored. */
async function seedPresets(stores: SeedStores, groupId: string, madeBy: string): Promise<void> {
  if ((await stores.presets.countIn(groupId)) > 0) return;
  const { presets, files } = await readSamples(stores.samples);
  if (files.length === 0) {
    stores.note('There are no samples (samples/manifest.json is missing), so no presets were stored.');
    return;
  }
  // Lists show the newest first; stored backwards they keep the order of the manifest.
  for (const { preset } of [...presets].reverse()) await stores.presets.insert(groupId, madeBy, preset);
}
