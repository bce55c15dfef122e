// Opens reports in Chromium and holds them against what a reader needs: nothing overflows at phone, laptop and A4 print
// width, in light and dark; no console error, no request beyond the file; axe-core finds nothing serious; texts of the
// pictures take no more room than their layout gave them.
//
// usage: node check.mjs FOLDER-OF-MODULES FOLDER-OF-SHOTS REPORT.html…
import { createRequire } from 'node:module';
import { basename, resolve } from 'node:path';
import { pathToFileURL } from 'node:url';

const [modules, shots, ...reports] = process.argv.slice(2);
const require = createRequire(resolve(modules, 'package.json'));
const { chromium } = require('playwright-core');
const axe = require.resolve('axe-core/axe.min.js');

const faults = [];
// A4 less the margins of the print style, at 96 pixels an inch.
const A4 = Math.floor(((210 - 28) / 25.4) * 96);
const VIEWS = [
  { name: 'phone', width: 390, height: 844, scheme: 'light' },
  { name: 'phone-dark', width: 390, height: 844, scheme: 'dark' },
  { name: 'laptop', width: 1366, height: 768, scheme: 'light' },
  { name: 'laptop-dark', width: 1366, height: 768, scheme: 'dark' },
  { name: 'a4', width: A4, height: 1000, scheme: 'light', print: true },
];

const browser = await chromium.launch({
  executablePath: process.env.CHROMIUM || '/usr/bin/chromium',
  args: ['--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking',
    '--disable-component-update', '--disable-sync'],
});
for (const report of reports) {
  const url = pathToFileURL(resolve(report)).href;
  for (const view of VIEWS) {
    const where = `${basename(report)}, ${view.name}`;
    const context = await browser.newContext({
      viewport: { width: view.width, height: view.height },
      colorScheme: view.scheme,
    });
    const page = await context.newPage();
    page.on('console', (message) => {
      if (['error', 'warning'].includes(message.type())) faults.push(`${where}: console: ${message.text()}`);
    });
    page.on('pageerror', (error) => faults.push(`${where}: ${error}`));
    page.on('request', (request) => {
      if (request.url() !== url) faults.push(`${where}: asks for ${request.url()}`);
    });
    if (view.print) await page.emulateMedia({ media: 'print', colorScheme: view.scheme });
    await page.goto(url);
    for (const fault of await page.evaluate(layout, Boolean(view.print))) faults.push(`${where}: ${fault}`);
    if (!view.print) {
      await page.addScriptTag({ path: axe });
      const found = await page.evaluate(() => globalThis.axe.run());
      for (const violation of found.violations) {
        if (!['serious', 'critical'].includes(violation.impact)) continue;
        const node = violation.nodes[0];
        faults.push(`${where}: ${violation.id}: ${violation.help}: ${node.html.slice(0, 160)} ${node.failureSummary}`);
      }
    } else {
      await page.pdf({ path: resolve(shots, `${basename(report)}.pdf`), preferCSSPageSize: true });
    }
    await page.screenshot({ path: resolve(shots, `${basename(report)}-${view.name}.png`), fullPage: true });
    await context.close();
  }
}
await browser.close();

function layout(print) {
  const faults = [];
  const root = document.documentElement;
  const width = root.clientWidth;
  if (root.scrollWidth > width) faults.push(`the page is ${root.scrollWidth} wide in ${width}`);
  const name = (e) => `<${e.tagName.toLowerCase()} class="${e.getAttribute('class') || ''}"> ${e.textContent.slice(0, 50)}`;
  for (const element of document.querySelectorAll('body *')) {
    const box = element.closest('.scroll');
    // What stands in a box that scrolls by itself may be wider than the page, but not on paper.
    if (element.closest('svg') || element.matches('.skip') || (box && element !== box && !print)) continue;
    const r = element.getBoundingClientRect();
    if (r.width > 0 && (r.right > width + 1 || r.left < -1)) faults.push(`sticks out (${Math.round(r.right)}): ${name(element)}`);
  }
  const blocks = [...document.querySelectorAll('article > *')].map((e) => [e, e.getBoundingClientRect()]);
  for (let i = 1; i < blocks.length; i += 1) {
    if (blocks[i][1].top < blocks[i - 1][1].bottom - 1) faults.push(`overlaps what stands before: ${name(blocks[i][0])}`);
  }
  for (const text of document.querySelectorAll('svg text')) {
    const capitals = parseFloat(text.getAttribute('font-size')) * 0.714;
    // Every text keeps a third of its capitals off all else.
    const room = ([...text.textContent].length + 0.3) * capitals;
    if (text.getComputedTextLength() > room + 0.5) faults.push(`text wider than its room: ${text.textContent}`);
  }
  if (document.querySelectorAll('svg text').length < 5 && !document.querySelector('.verdict.refused')) faults.push('no picture');
  return faults.slice(0, 12);
}

if (faults.length > 0) {
  console.error(faults.join('\n'));
  process.exit(1);
}
console.log(`browser: ${reports.length} reports in ${VIEWS.length} views: nothing found`);
