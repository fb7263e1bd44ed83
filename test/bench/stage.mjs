// One stage of `npm run bench` in a process of its own, so that its peak memory is its own. Prints JSON.
//   node stage.mjs parse|import|survey tracks.csv

import { createReadStream } from 'node:fs';
import Papa from 'papaparse';
import { importTracks } from '../../dist/src/import/importTracks.js';
import { surveyTracks } from '../../dist/src/momenta/surveyTracks.js';

const [, , stage, path] = process.argv;
const open = () => createReadStream(path, { highWaterMark: 1 << 20 });
let start = performance.now();
let before = process.cpuUsage();
let rows = 0;
if (stage === 'parse') {
  await new Promise((done, failed) => {
    const count = ({ data }) => {
      rows += data.length;
    };
    Papa.parse(open(), { header: false, skipEmptyLines: true, chunk: count, complete: done, error: failed });
  });
  rows -= 1; // the header
} else {
  const { tracks, counts } = await importTracks([{ name: path, chunks: open() }]);
  rows = counts.rows;
  if (stage === 'survey') {
    start = performance.now();
    before = process.cpuUsage();
    surveyTracks(tracks);
  }
}
const seconds = (performance.now() - start) / 1000;
const { user, system } = process.cpuUsage(before);
const processor = (user + system) / 1e6;
console.log(JSON.stringify({ rows, seconds, processor, megabytes: process.resourceUsage().maxRSS / 1024 }));
