import { useForm } from 'react-hook-form';
import { ProblemNote } from '../../../components/page/ProblemNote';
import { Button } from '../../../components/ui/Button';
import { Field, TextInput } from '../../../components/ui/Field';
import { useChangePassword } from '../api/change-password';

interface PasswordFields {
  current: string;
  next: string;
  again: string;
}

/** As the server wants it. */
const SHORTEST = 10;
const LONGEST = 128;
const EMPTY: PasswordFields = { current: '', next: '', again: '' };

export function PasswordForm({ email }: { email: string }) {
  const change = useChangePassword();
  const { register, handleSubmit, formState, getValues, reset } = useForm<PasswordFields>({
    defaultValues: EMPTY,
  });
  const { errors } = formState;
  const submit = handleSubmit(({ current, next }) =>
    change.mutate({ currentPassword: current, newPassword: next }, { onSuccess: () => reset(EMPTY) }),
  );
  return (
    <form noValidate onSubmit={submit} className="flex max-w-sm flex-col gap-4 pt-3">
      {/* Tells a password keeper whose password this is. */}
      <input type="hidden" autoComplete="username" value={email} readOnly />
      <Field label="Present password" error={errors.current?.message ?? null}>
        {(control) => (
          <TextInput
            {...control}
            {...register('current', { required: 'Type the password you signed in with.' })}
            type="password"
            autoComplete="current-password"
          />
        )}
      </Field>
      <Field
        label="New password"
        hint={`${SHORTEST} characters or more; other machines are signed out.`}
        error={errors.next?.message ?? null}
      >
        {(control) => (
          <TextInput
            {...control}
            {...register('next', {
              required: 'Type the new password.',
              minLength: { value: SHORTEST, message: `Too short: ${SHORTEST} characters or more.` },
              maxLength: { value: LONGEST, message: `Too long: ${LONGEST} characters at most.` },
            })}
            type="password"
            autoComplete="new-password"
          />
        )}
      </Field>
      <Field label="New password again" error={errors.again?.message ?? null}>
        {(control) => (
          <TextInput
            {...control}
            {...register('again', {
              validate: (again) =>
                again === getValues('next') || 'The two new passwords differ: type the same in both.',
            })}
            type="password"
            autoComplete="new-password"
          />
        )}
      </Field>
      {change.error === null ? null : <ProblemNote error={change.error} />}
      <div className="flex items-center gap-4">
        <Button type="submit" disabled={change.isPending}>
          {change.isPending ? 'Changing …' : 'Change the password'}
        </Button>
        <span role="status" className="text-dim">
          {change.isSuccess ? 'Changed.' : ''}
        </span>
      </div>
    </form>
  );
}
