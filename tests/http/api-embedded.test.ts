import { openEmbedded } from '../../server/data/client';
import { apiSuite } from './api-suite';

apiSuite('API on the embedded database', () => openEmbedded(null));
