/**
 * The only script of the page: says the value nearest to the pointer, and lets the arrow keys walk through the values
 * of a picture that has the focus. It reads numbers already in the page and writes text, nothing else.
 */
export const PAGE_SCRIPT = `
'use strict';
for (const plot of document.querySelectorAll('.plot[data-probes]')) {
  const svg = plot.querySelector('svg');
  const output = plot.querySelector('output');
  const spot = document.createElementNS('http://www.w3.org/2000/svg', 'circle');
  spot.setAttribute('class', 'spot');
  spot.setAttribute('r', '4.5');
  let probes = null;
  let isCurve = false;
  let current = -1;
  const open = () => {
    if (probes) return;
    probes = JSON.parse(plot.dataset.probes);
    isCurve = new Set(probes.map((probe) => probe[0])).size === probes.length;
  };
  const scale = () => svg.getBoundingClientRect().width / svg.viewBox.baseVal.width;
  const show = (index) => {
    current = index;
    const [x, y, text] = probes[index];
    spot.setAttribute('cx', x);
    spot.setAttribute('cy', y);
    svg.append(spot);
    output.textContent = text;
    const [left, top] = [x * scale(), y * scale()];
    const room = plot.clientWidth - output.offsetWidth;
    output.style.left = Math.max(0, Math.min(room, left - output.offsetWidth / 2)) + 'px';
    const above = top - output.offsetHeight - 12;
    output.style.top = (above < -20 ? top + 12 : above) + 'px';
  };
  const hide = () => {
    spot.remove();
    output.textContent = '';
    current = -1;
  };
  const point = (event) => {
    open();
    const box = svg.getBoundingClientRect();
    const x = (event.clientX - box.left) / scale();
    const y = (event.clientY - box.top) / scale();
    let best = 0;
    let least = Infinity;
    probes.forEach((probe, index) => {
      const distance = (probe[0] - x) ** 2 + (isCurve ? 0 : (probe[1] - y) ** 2);
      if (distance < least) [best, least] = [index, distance];
    });
    show(best);
  };
  plot.addEventListener('pointermove', point);
  plot.addEventListener('pointerdown', point);
  plot.addEventListener('pointerleave', () => { if (document.activeElement !== plot) hide(); });
  plot.addEventListener('blur', hide);
  plot.addEventListener('focus', () => {
    open();
    if (current < 0) show(Math.floor(probes.length / 2));
  });
  const directions = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] };
  plot.addEventListener('keydown', (event) => {
    if (event.key === 'Escape') { plot.blur(); return; }
    const direction = directions[event.key];
    if (!direction) return;
    event.preventDefault();
    open();
    const from = probes[Math.max(current, 0)];
    let best = -1;
    let least = Infinity;
    probes.forEach((probe, index) => {
      const [dx, dy] = [probe[0] - from[0], probe[1] - from[1]];
      const ahead = isCurve ? dx * (direction[0] || -direction[1]) : dx * direction[0] + dy * direction[1];
      if (ahead <= 0) return;
      const aside = isCurve ? 0 : Math.abs(dx * direction[1]) + Math.abs(dy * direction[0]);
      const distance = ahead + 3 * aside;
      if (distance < least) [best, least] = [index, distance];
    });
    if (best >= 0) show(best);
  });
}
`;
