import { Lamp, Presentation } from 'lucide-react';
import { useThemeStore } from '../../lib/theme/theme';
import { IconButton } from '../ui/IconButton';

/** One button between the two themes; its name says what it will do. */
export function ThemeToggle() {
  const { theme, setTheme } = useThemeStore();
  const bench = theme === 'bench';
  return (
    <IconButton
      label={bench ? 'Projector theme, for a bright room' : 'Bench theme, for a dark lab'}
      onClick={() => setTheme(bench ? 'projector' : 'bench')}
    >
      {bench ? <Presentation size={16} aria-hidden="true" /> : <Lamp size={16} aria-hidden="true" />}
    </IconButton>
  );
}
