import { useForm } from 'react-hook-form';
import { ProblemNote } from '../../../components/page/ProblemNote';
import { Button } from '../../../components/ui/Button';
import { Field, TextInput } from '../../../components/ui/Field';
import type { Credentials } from '../api/sign-in';

export interface SignInFormProps {
  pending: boolean;
  error: Error | null;
  onSubmit(credentials: Credentials): void;
}

export function SignInForm({ pending, error, onSubmit }: SignInFormProps) {
  const { register, handleSubmit, formState } = useForm<Credentials>({
    defaultValues: { email: '', password: '' },
  });
  const { errors } = formState;
  return (
    <form noValidate className="flex flex-col gap-4" onSubmit={handleSubmit(onSubmit)}>
      <Field label="E-mail" error={errors.email?.message ?? null}>
        {(control) => (
          <TextInput
            {...control}
            {...register('email', {
              required: 'Type the e-mail address your group knows you by.',
              pattern: { value: /^\S+@\S+$/, message: 'An e-mail address has an @ in it, and no spaces.' },
            })}
            type="email"
            autoComplete="username"
            spellCheck={false}
          />
        )}
      </Field>
      <Field label="Password" error={errors.password?.message ?? null}>
        {(control) => (
          <TextInput
            {...control}
            {...register('password', { required: 'Type your password.' })}
            type="password"
            autoComplete="current-password"
          />
        )}
      </Field>
      {error === null ? null : <ProblemNote error={error} />}
      <Button type="submit" variant="primary" disabled={pending} className="self-start">
        {pending ? 'Signing in …' : 'Sign in'}
      </Button>
    </form>
  );
}
