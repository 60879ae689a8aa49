import { useMutation } from '@tanstack/react-query';
import { z } from '../../../../shared/util/zod';
import { RequestProblem } from '../../../lib/errors/request-problem';
import { request } from '../../../lib/http/request';

export interface PasswordChange {
  currentPassword: string;
  newPassword: string;
}

async function changePassword({ currentPassword, newPassword }: PasswordChange): Promise<void> {
  try {
    await request(z.unknown(), '/api/auth/change-password', {
      method: 'POST',
      json: { currentPassword, newPassword, revokeOtherSessions: true },
    });
  } catch (error) {
    // The server passes the words of its sign-in library on; a colleague would say which of the two is meant.
    if (!(error instanceof RequestProblem) || !/invalid password/i.test(error.message)) throw error;
    throw new RequestProblem(
      error.code,
      'The present password is not right, and nothing was changed. Type the one you signed in with.',
      { status: error.status, cause: error },
    );
  }
}

/** Ends the person's sessions on other machines too: a password is changed when it may be known to others. */
export function useChangePassword() {
  return useMutation({
    mutationFn: changePassword,
  });
}
