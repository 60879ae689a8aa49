import { Button } from '../../../components/ui/Button';
import { sequenceOffers } from '../model/sequence';
import { useBench, useBenchPlan } from './bench-context';

const offersOf = ({ shelf }: { shelf: Parameters<typeof sequenceOffers>[0] }) => sequenceOffers(shelf);

/** Files dropped together that look like parts of one acquisition: they stay apart unless a person says otherwise. */
export function SequenceOffers() {
  const { store } = useBench();
  const offers = useBenchPlan(offersOf);
  return offers.map(({ ids, names }) => (
    <section key={ids[0]} aria-label="Files of one kind" className="mb-4 border-t border-line pt-2.5">
      <p className="text-sm wrap-anywhere">
        {names[0]} to {names[names.length - 1]} have one extension and one layout.
      </p>
      <span className="mt-2 flex flex-wrap gap-2">
        <Button size="sm" onClick={() => store.getState().join(ids)}>
          One acquisition in {ids.length} files
        </Button>
        <Button size="sm" variant="quiet" onClick={() => store.getState().keepApart(ids)}>
          Separate acquisitions
        </Button>
      </span>
    </section>
  ));
}
