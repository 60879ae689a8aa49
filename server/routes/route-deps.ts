import type { IncomingHttpHeaders } from 'node:http';
import type { ServerInfo } from '../../shared/contracts/http';
import type { MapStore } from '../data/map-store';
import type { People, PersonRecord } from '../data/repositories/people';
import type { Presets } from '../data/repositories/presets';
import type { Results } from '../data/repositories/results';
import type { Sessions } from '../data/repositories/sessions';
import type { SampleStore } from '../data/sample-store';

/** What the routes stand on; `createApp` is given it, tests give their own. */
export interface RouteDeps {
  people: People;
  presets: Presets;
  sessions: Sessions;
  results: Results;
  maps: MapStore;
  samples: SampleStore;
  info: ServerInfo;
  /** The person of a request's session cookie. */
  whoIs(headers: IncomingHttpHeaders): Promise<PersonRecord | null>;
  /** True for people who may not sign in on this server, whatever their password. */
  isBarred(email: string): boolean;
  /** Answers a request of the sign-in library, given and returned as web standard objects. */
  signInLibrary(request: globalThis.Request): Promise<globalThis.Response>;
  origin: string;
  trustedOrigins: readonly string[];
}
