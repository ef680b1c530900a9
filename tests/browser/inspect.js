// Runs beside sheets shown in frames of given widths, and writes what is wrong with them into
// the page, one line each: text over text, text outside its figure, content wider than the page,
// anything fetched, styles that did not apply.
const overlaps = (a, b) =>
  Math.min(a.right, b.right) - Math.max(a.left, b.left) > 1 &&
  Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top) > 4;

function figures(page) {
  return [...page.querySelectorAll('svg[role=img]')].filter((figure) => figure.getClientRects().length);
}

function inspect(page, frame) {
  const wrong = [];
  for (const figure of figures(page)) {
    const name = figure.querySelector('title')?.textContent ?? 'figure without a title';
    const box = figure.getBoundingClientRect();
    const texts = [...figure.querySelectorAll('text')].map((text) => [text.textContent, text.getBoundingClientRect()]);
    texts.forEach(([text, at], index) => {
      if (at.left < box.left - 1.5 || at.right > box.right + 1.5 || at.top < box.top - 2 || at.bottom > box.bottom + 3) {
        wrong.push(`${name}: "${text}" stands outside the figure`);
      }
      for (const [other, there] of texts.slice(index + 1)) {
        if (overlaps(at, there)) wrong.push(`${name}: "${text}" over "${other}"`);
      }
    });
  }
  const wide = [...page.body.querySelectorAll('*')].filter(
    (element) =>
      !element.closest('svg') && !element.closest('.box') && element.getClientRects().length &&
      element.getBoundingClientRect().right > frame.clientWidth + 1,
  );
  for (const element of wide) wrong.push(`<${element.tagName.toLowerCase()}> is wider than the page`);
  const fetched = frame.contentWindow.performance.getEntriesByType('resource');
  for (const entry of fetched) wrong.push(`${entry.name} was fetched`);
  if (getComputedStyle(page.body).marginTop !== '0px') wrong.push('the style block did not apply');
  return wrong;
}

const out = document.createElement('pre');
out.id = 'out';
const waiting = SHEETS.flatMap(([name, text]) =>
  WIDTHS.map(
    (width) =>
      new Promise((done) => {
        const frame = document.createElement('iframe');
        frame.width = width;
        frame.height = 900;
        frame.onload = () => {
          const page = frame.contentDocument;
          const lines = inspect(page, frame).map((line) => `WRONG ${name} at ${width}: ${line}`);
          lines.push(`SEEN ${name} at ${width}: ${figures(page).length} figures`);
          out.append(lines.join('\n') + '\n');
          done();
        };
        frame.srcdoc = text;
        document.body.append(frame);
      }),
  ),
);
Promise.all(waiting).then(() => {
  out.append('DONE\n');
  document.body.prepend(out);
});
