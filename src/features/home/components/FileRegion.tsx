import { useEffect } from 'react';
import { Link, useNavigate } from 'react-router-dom';
import { Region } from '../../../components/page/Page';
import { buttonClass } from '../../../components/ui/Button';
import { handOverFiles } from '../../../state/dropped-files';

/** A file dropped on this page would replace it in the browser; instead it goes to the bench. */
function useDropToBench(): void {
  const navigate = useNavigate();
  useEffect(() => {
    const allow = (event: DragEvent): void => event.preventDefault();
    const onDrop = (event: DragEvent): void => {
      event.preventDefault();
      const files = [...(event.dataTransfer?.files ?? [])];
      if (files.length === 0) return;
      handOverFiles(files);
      void navigate('/bench');
    };
    window.addEventListener('dragover', allow);
    window.addEventListener('drop', onDrop);
    return () => {
      window.removeEventListener('dragover', allow);
      window.removeEventListener('drop', onDrop);
    };
  }, [navigate]);
}

export function FileRegion() {
  useDropToBench();
  return (
    <Region name="your own files">
      <div className="flex items-start gap-5 pt-4">
        <Link to="/bench" className={`${buttonClass('plain', 'md')} h-10 px-5`}>
          Go to the bench
        </Link>
        <p className="min-w-0 flex-1 text-dim">
          Drop them here or there: HDF5, NumPy, TIFF, text or fixed-width binary records. They are read on
          this machine and never leave it.
        </p>
      </div>
    </Region>
  );
}
