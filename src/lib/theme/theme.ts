import { create } from 'zustand';
import { readSetting, writeSetting } from '../settings';

export type Theme = 'bench' | 'projector';

const KEY = 'theme';

interface ThemeState {
  theme: Theme;
  setTheme(theme: Theme): void;
}

function show(theme: Theme): void {
  document.documentElement.dataset.theme = theme;
}

/** bench for the dark lab, projector for the bright room; remembered on this machine. */
export const useThemeStore = create<ThemeState>()((set) => ({
  theme: readSetting(KEY) === 'projector' ? 'projector' : 'bench',
  setTheme: (theme) => {
    writeSetting(KEY, theme);
    show(theme);
    set({ theme });
  },
}));

/** Before the first drawing, so that the page never blinks. */
export function startTheme(): void {
  show(useThemeStore.getState().theme);
}

export function useTheme(): Theme {
  return useThemeStore((state) => state.theme);
}
