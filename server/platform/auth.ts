import { betterAuth } from 'better-auth';
import { drizzleAdapter } from 'better-auth/adapters/drizzle';
import { hashPassword } from 'better-auth/crypto';
import { organization } from 'better-auth/plugins';
import { createAccessControl } from 'better-auth/plugins/access';
import { redact } from './safe-error';

/**
 * Who may do what to a group itself. What may be done to presets, sessions and results is the table of
 * shared/contracts/permissions, asked by every route.
 */
const accessControl = createAccessControl({
  organization: ['update', 'delete'],
  member: ['create', 'update', 'delete'],
  invitation: ['create', 'cancel'],
} as const);
const groupRoles = {
  lead: accessControl.newRole({
    organization: ['update'],
    member: ['create', 'update', 'delete'],
    invitation: ['create', 'cancel'],
  }),
  analyst: accessControl.newRole({ organization: [] }),
  runner: accessControl.newRole({ organization: [] }),
  guest: accessControl.newRole({ organization: [] }),
};

export interface AuthOptions {
  db: Parameters<typeof drizzleAdapter>[0];
  schema: Record<string, unknown>;
  secret: string;
  origin: string;
  trustedOrigins: string[];
  log(level: 'debug' | 'info' | 'success' | 'warn' | 'error', message: string): void;
}

export interface Auth {
  handler(request: Request): Promise<Response>;
  /** The person of a session cookie, or null. */
  whoIs(headers: {
    cookie?: string | undefined;
  }): Promise<{ id: string; name: string; email: string } | null>;
}

/** Sign-in with e-mail and password; nobody signs up by themselves. Sessions are rows, so signing out ends them. */
export function createAuth(options: AuthOptions): Auth {
  const auth = betterAuth({
    appName: 'Gemel',
    baseURL: options.origin,
    basePath: '/api/auth',
    secret: options.secret,
    trustedOrigins: options.trustedOrigins,
    telemetry: { enabled: false },
    // The routes limit attempts themselves.
    rateLimit: { enabled: false },
    logger: { level: 'warn', log: (level, message) => options.log(level, redact(message)) },
    // What fails inside is thrown to the route, which logs it; the library would print it whole on the console.
    onAPIError: { throw: true },
    database: drizzleAdapter(options.db, { provider: 'pg', schema: options.schema, transaction: true }),
    emailAndPassword: { enabled: true, disableSignUp: true, minPasswordLength: 10 },
    advanced: {
      cookiePrefix: 'gemel',
      useSecureCookies: options.origin.startsWith('https:'),
      defaultCookieAttributes: { httpOnly: true, sameSite: 'lax' },
      ipAddress: { disableIpTracking: true },
    },
    plugins: [
      organization({
        ac: accessControl,
        roles: groupRoles,
        creatorRole: 'lead',
        allowUserToCreateOrganization: false,
        disableOrganizationDeletion: true,
      }),
    ],
  });
  return {
    handler: (request) => auth.handler(request),
    async whoIs(headers) {
      const cookie = headers.cookie;
      if (cookie === undefined) return null;
      const found = await auth.api.getSession({ headers: new Headers({ cookie }) });
      return found === null ? null : { id: found.user.id, name: found.user.name, email: found.user.email };
    },
  };
}

/** Salted scrypt, as the sign-in checks it. */
export function hashNewPassword(password: string): Promise<string> {
  return hashPassword(password);
}
