import './app/nonce';
import './app/styles.css';
import { StrictMode } from 'react';
import { createRoot } from 'react-dom/client';
import { Providers } from './app/providers';
import { startTheme } from './lib/theme/theme';

startTheme();
const root = document.getElementById('root');
if (root === null) throw new Error('index.html has no element with the id "root".');
createRoot(root).render(
  <StrictMode>
    <Providers />
  </StrictMode>,
);
