import { useEffect, useRef } from 'react';
import { useBench } from './bench-context';

interface BenchKeys {
  open(): void;
  readOnly: boolean;
}

function isTyping(target: EventTarget | null): boolean {
  if (!(target instanceof HTMLElement)) return false;
  return target.isContentEditable || ['INPUT', 'TEXTAREA', 'SELECT'].includes(target.tagName);
}

/** Ctrl+Z and Ctrl+Shift+Z for the dials, Ctrl+O for files; a text field keeps its own undo, a dialog its peace. */
export function useBenchKeys(keys: BenchKeys): void {
  const { store } = useBench();
  const latest = useRef(keys);
  latest.current = keys;
  useEffect(() => {
    const listen = (event: KeyboardEvent): void => {
      if (!(event.ctrlKey || event.metaKey) || event.altKey || event.defaultPrevented) return;
      if (document.querySelector('[role=dialog]') !== null) return;
      const key = event.key.toLowerCase();
      if (key === 'o' && !event.shiftKey) {
        event.preventDefault();
        latest.current.open();
        return;
      }
      if (isTyping(event.target) || latest.current.readOnly) return;
      const { undo, redo } = store.getState();
      if (key === 'z' && !event.shiftKey) undo();
      else if ((key === 'z' && event.shiftKey) || key === 'y') redo();
      else return;
      event.preventDefault();
    };
    window.addEventListener('keydown', listen);
    return () => window.removeEventListener('keydown', listen);
  }, [store]);
}
