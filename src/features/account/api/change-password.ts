import { useMutation } from '@tanstack/react-query';
import { z } from '../../../../shared/util/zod';
import { request } from '../../../lib/http/request';

export interface PasswordChange {
  currentPassword: string;
  newPassword: string;
}

/** Ends the person's sessions on other machines too: a password is changed when it may be known to others. */
export function useChangePassword() {
  return useMutation({
    mutationFn: ({ currentPassword, newPassword }: PasswordChange) =>
      request(z.unknown(), '/api/auth/change-password', {
        method: 'POST',
        json: { currentPassword, newPassword, revokeOtherSessions: true },
      }),
  });
}
