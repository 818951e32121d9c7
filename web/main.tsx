import { render } from 'preact';
import { App } from './app.tsx';

const page = document.getElementById('page');
if (page) render(<App />, page);
