import { useEffect, useState } from 'react';
import { Link } from 'react-router-dom';
import { Region } from '../../../components/page/Page';
import { buttonClass } from '../../../components/ui/Button';

/** A file dropped on this page would replace it in the browser; instead the page says where files go. */
function useStrayDrop(): boolean {
  const [dropped, setDropped] = useState(false);
  useEffect(() => {
    const allow = (event: DragEvent): void => event.preventDefault();
    const onDrop = (event: DragEvent): void => {
      event.preventDefault();
      setDropped(true);
    };
    window.addEventListener('dragover', allow);
    window.addEventListener('drop', onDrop);
    return () => {
      window.removeEventListener('dragover', allow);
      window.removeEventListener('drop', onDrop);
    };
  }, []);
  return dropped;
}

export function FileRegion() {
  const dropped = useStrayDrop();
  return (
    <Region name="your own files">
      <div className="flex items-start gap-5 pt-4">
        <Link to="/bench" className={`${buttonClass('plain', 'md')} h-10 px-5`}>
          Go to the bench
        </Link>
        <p className="min-w-0 flex-1 text-dim" aria-live="polite">
          {dropped
            ? 'Files are dropped on the bench: go there and drop them again.'
            : 'Drop HDF5 files or time-tag records there. They are read on this machine and never leave it.'}
        </p>
      </div>
    </Region>
  );
}
