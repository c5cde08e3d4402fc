import './without-eval.js';
import { render } from 'preact';
import { App } from './app.js';

const page = document.getElementById('page');
if (page !== null) {
  page.replaceChildren();
  render(<App />, page);
}
