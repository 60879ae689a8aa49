import { Facts } from '../../components/page/Facts';
import { Page, Region } from '../../components/page/Page';
import { Select } from '../../components/ui/Select';
import { Table, Td, Th } from '../../components/ui/Table';
import { useMe } from '../../lib/query/me';
import { useThemeStore } from '../../lib/theme/theme';
import { PasswordForm } from './components/PasswordForm';

const ROLE_WORDS = {
  lead: 'everything an analyst may, and delete results of others',
  analyst: 'open data, make presets, save and delete own results',
  runner: 'open data, run presets, save results',
  guest: 'read results',
} as const;

export function AccountPage() {
  const { user, groups } = useMe();
  return (
    <Page title="Account" heading="Account">
      <div className="grid max-w-6xl lg:grid-cols-2">
        <div className="min-w-0">
          <Region name="person">
            <Facts
              facts={[
                { name: 'name', value: user.name },
                { name: 'e-mail', value: user.email },
              ]}
            />
          </Region>
          <Region name="groups" note={String(groups.length)}>
            {groups.length === 0 ? (
              <p className="py-3 text-dim">You are in no group yet. A lead of a group can add you.</p>
            ) : (
              <Table label="Groups">
                <thead>
                  <tr>
                    <Th>group</Th>
                    <Th>role</Th>
                    <Th>may</Th>
                  </tr>
                </thead>
                <tbody>
                  {groups.map((group) => (
                    <tr key={group.id} className="border-b border-line">
                      <Td className="py-1.5">{group.name}</Td>
                      <Td mono>{group.role}</Td>
                      <Td className="text-dim">{ROLE_WORDS[group.role]}</Td>
                    </tr>
                  ))}
                </tbody>
              </Table>
            )}
          </Region>
          <Region name="theme">
            <ThemeChoice />
          </Region>
        </div>
        <div className="min-w-0">
          <Region name="password">
            <PasswordForm email={user.email} />
          </Region>
        </div>
      </div>
    </Page>
  );
}

function ThemeChoice() {
  const { theme, setTheme } = useThemeStore();
  return (
    <div className="flex items-baseline gap-4 pt-3">
      <Select
        aria-label="Theme"
        value={theme}
        onValueChange={(value) => setTheme(value === 'projector' ? 'projector' : 'bench')}
        options={[
          { value: 'bench', label: 'bench', hint: 'dim and warm, for a dark lab' },
          { value: 'projector', label: 'projector', hint: 'paper white, large, for a bright room' },
        ]}
      />
      <span className="text-dim">Remembered on this machine.</span>
    </div>
  );
}
