import { type DragEvent, useState } from 'react';
import { Link } from 'react-router-dom';
import { Region } from '../../../components/page/Page';
import { buttonClass } from '../../../components/ui/Button';

/** Own files open on the bench; a file dropped here must at least not replace the page. */
export function FileRegion() {
  const [dropped, setDropped] = useState(false);
  const onDrop = (event: DragEvent): void => {
    event.preventDefault();
    setDropped(true);
  };
  return (
    <Region name="your own files">
      <section
        aria-label="Files"
        className="flex items-start gap-5 pt-4"
        onDragOver={(event) => event.preventDefault()}
        onDrop={onDrop}
      >
        <Link to="/bench" className={`${buttonClass('plain', 'md')} h-10 px-5`}>
          Go to the bench
        </Link>
        <p className="min-w-0 flex-1 text-dim" aria-live="polite">
          {dropped
            ? 'Files are dropped on the bench: go there and drop them again.'
            : 'Drop HDF5 files or time-tag records there. They are read on this machine and never leave it.'}
        </p>
      </section>
    </Region>
  );
}
