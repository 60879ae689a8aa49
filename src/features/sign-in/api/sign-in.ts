import { type QueryClient, useMutation, useQueryClient } from '@tanstack/react-query';
import { z } from '../../../../shared/util/zod';
import { request } from '../../../lib/http/request';
import { meQuery } from '../../../lib/query/me';

export interface Credentials {
  email: string;
  password: string;
}

/**
 * Signs in and forgets what was fetched before. True when the person is another one than before in this window: then
 * the page must be loaded anew, because the bench may still hold the first person's data.
 */
export async function signIn(client: QueryClient, credentials: Credentials): Promise<boolean> {
  const before = client.getQueryData(meQuery.queryKey)?.user.id;
  await request(z.unknown(), '/api/auth/sign-in/email', { method: 'POST', json: credentials });
  client.clear();
  const me = await client.fetchQuery(meQuery);
  return before !== undefined && before !== me.user.id;
}

export function useSignIn(onDone: (isOtherPerson: boolean) => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (credentials: Credentials) => signIn(client, credentials),
    onSuccess: onDone,
  });
}
