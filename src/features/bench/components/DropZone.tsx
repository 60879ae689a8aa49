import { type DragEvent, type ReactNode, useRef, useState } from 'react';

export interface DropZoneProps {
  onFiles(files: File[]): void;
  children: ReactNode;
}

function carriesFiles(event: DragEvent): boolean {
  return event.dataTransfer.types.includes('Files');
}

/** Files may be dropped anywhere on it. */
export function DropZone({ onFiles, children }: DropZoneProps) {
  // Entering a child fires a leave of the parent: only the balance tells whether the files are still over the page.
  const depth = useRef(0);
  const [over, setOver] = useState(false);
  const enter = (by: number): void => {
    depth.current = Math.max(0, depth.current + by);
    setOver(depth.current > 0);
  };
  return (
    // biome-ignore lint/a11y/noStaticElementInteractions: dropping is the mouse's way; the button on the shelf is the other
    <div
      className="relative flex h-full min-h-0 flex-col"
      data-testid="bench-drop"
      onDragEnter={(event) => carriesFiles(event) && enter(1)}
      onDragLeave={(event) => carriesFiles(event) && enter(-1)}
      onDragOver={(event) => {
        if (carriesFiles(event)) event.preventDefault();
      }}
      onDrop={(event) => {
        depth.current = 0;
        setOver(false);
        if (!carriesFiles(event)) return;
        event.preventDefault();
        onFiles([...event.dataTransfer.files]);
      }}
    >
      {children}
      {over ? (
        <div className="pointer-events-none absolute inset-0 z-30 flex items-center justify-center border-2 border-dashed border-text bg-scrim">
          <p className="bg-bg px-4 py-2 text-lg">
            Drop to put on the shelf: HDF5, NumPy, TIFF, text or binary records. The bytes stay on this
            machine.
          </p>
        </div>
      ) : null}
    </div>
  );
}
