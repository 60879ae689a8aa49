import { useNavigate, useSearchParams } from 'react-router-dom';
import { ThemeToggle } from '../../components/page/ThemeToggle';
import { Mark } from '../../components/ui/Mark';
import { readBack } from '../../lib/query/sign-in-path';
import { useSignIn } from './api/sign-in';
import { DemoSignIn } from './components/DemoSignIn';
import { PairFigure } from './components/PairFigure';
import { SignInForm } from './components/SignInForm';

export function SignInPage() {
  const [search] = useSearchParams();
  const navigate = useNavigate();
  const back = readBack(search);
  const signIn = useSignIn((isOtherPerson) => {
    if (isOtherPerson) window.location.assign(back);
    else void navigate(back, { replace: true });
  });
  return (
    <main className="grid min-h-dvh lg:grid-cols-[minmax(24rem,2fr)_5fr]">
      <title>Sign in · Gemel</title>
      <div className="flex flex-col px-8 py-5 lg:border-r">
        <div className="flex items-center gap-3">
          <Mark size={26} />
          <span className="font-mono text-base font-semibold">Gemel</span>
          <span className="flex-1" />
          <ThemeToggle />
        </div>
        <div className="my-auto w-full max-w-sm py-10">
          <h1 className="text-xl font-semibold">Sign in</h1>
          <p className="mt-1 mb-6 text-dim">
            {back === '/'
              ? 'Photon-pair data from detector arrays, from raw clicks to claims that survive review.'
              : 'Sign in and you are taken back to where you were.'}
          </p>
          <SignInForm pending={signIn.isPending} error={signIn.error} onSubmit={signIn.mutate} />
          <DemoSignIn pending={signIn.isPending} onUse={signIn.mutate} />
        </div>
        <p className="text-xs text-dim">
          Raw data stays on this machine. The server keeps people, sessions, presets and results.
        </p>
      </div>
      <div className="flex min-h-0 flex-col justify-center px-10 max-lg:hidden">
        <PairFigure />
      </div>
    </main>
  );
}
