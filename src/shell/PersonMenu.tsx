import { useMutation } from '@tanstack/react-query';
import { ChevronDown } from 'lucide-react';
import { useState } from 'react';
import { useNavigate } from 'react-router-dom';
import { ProblemNote } from '../components/page/ProblemNote';
import { Dialog } from '../components/ui/Dialog';
import { Menu, type MenuItem } from '../components/ui/Menu';
import { useGroupChoice } from '../lib/query/group-choice';
import { useGroup, useMe } from '../lib/query/me';
import { EngineDialog } from './EngineDialog';
import { signOut } from './sign-out';

/** Name and role; groups when there are several; account, engine and the way out. */
export function PersonMenu() {
  const me = useMe();
  const group = useGroup();
  const choose = useGroupChoice((state) => state.choose);
  const navigate = useNavigate();
  const [engineOpen, setEngineOpen] = useState(false);
  const leaving = useMutation({ mutationFn: signOut });
  const groups: MenuItem[] =
    me.groups.length < 2
      ? []
      : [
          ...me.groups.map(
            (each): MenuItem => ({
              kind: 'check',
              label: each.name,
              checked: each.id === group?.id,
              onChange: () => choose(each.id),
            }),
          ),
          { kind: 'separator', id: 'groups' },
        ];
  const items: MenuItem[] = [
    { kind: 'heading', label: me.user.email },
    { kind: 'separator', id: 'person' },
    ...groups,
    { label: 'Account', onSelect: () => void navigate('/account') },
    { label: 'Engine …', onSelect: () => setEngineOpen(true) },
    { label: 'Sign out', onSelect: () => leaving.mutate() },
  ];
  return (
    <>
      <Menu
        align="end"
        items={items}
        trigger={
          <button
            type="button"
            className="flex h-7 items-center gap-2 rounded-sm px-1.5 text-sm text-text hover:bg-shade"
          >
            <span className="max-sm:sr-only">{me.user.name}</span>
            {group === null ? null : <span className="font-mono text-xs text-dim">{group.role}</span>}
            <ChevronDown size={14} aria-hidden="true" className="text-dim" />
          </button>
        }
      />
      {engineOpen ? <EngineDialog onClose={() => setEngineOpen(false)} /> : null}
      <Dialog
        open={leaving.isError}
        onOpenChange={() => leaving.reset()}
        title="You are still signed in"
        size="sm"
      >
        <ProblemNote error={leaving.error} />
      </Dialog>
    </>
  );
}
