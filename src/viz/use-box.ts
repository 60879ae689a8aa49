import { type RefObject, startTransition, useLayoutEffect, useRef, useState } from 'react';

export interface Box {
  width: number;
  height: number;
  /** Text size of the plot in CSS pixels; margins are measured in it. */
  em: number;
}

/** Size of an element as it changes. Zero until measured, so nothing is drawn at a wrong size first. */
export function useBox<T extends HTMLElement>(): [RefObject<T | null>, Box] {
  const ref = useRef<T>(null);
  const [box, setBox] = useState<Box>({ width: 0, height: 0, em: 11 });
  useLayoutEffect(() => {
    const element = ref.current;
    if (element === null) return;
    const measure = (): void => {
      const { clientWidth: width, clientHeight: height } = element;
      const em = Number.parseFloat(getComputedStyle(element).fontSize) || 11;
      setBox((old) =>
        old.width === width && old.height === height && old.em === em ? old : { width, height, em },
      );
    };
    // The observer tells the first size too, after the layout: asking for it here would force one in the middle of drawing.
    // Ten plots that appear together are then drawn one after the other, not in one long task.
    let isFirst = true;
    const observer = new ResizeObserver(() => {
      if (isFirst) startTransition(measure);
      else measure();
      isFirst = false;
    });
    observer.observe(element);
    // A theme changes the text size and not the box.
    const themes = new MutationObserver(measure);
    themes.observe(document.documentElement, { attributes: true, attributeFilter: ['data-theme'] });
    return () => {
      observer.disconnect();
      themes.disconnect();
    };
  }, []);
  return [ref, box];
}
