import { create } from 'zustand';
import { readSetting, writeSetting } from '../settings';

interface GroupChoice {
  id: string | null;
  choose(id: string): void;
}

const KEY = 'group';

/** Which of the person's groups is open, remembered on this machine. */
export const useGroupChoice = create<GroupChoice>()((set) => ({
  id: readSetting(KEY),
  choose: (id) => {
    writeSetting(KEY, id);
    set({ id });
  },
}));
