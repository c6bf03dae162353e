// Writes miniseed3.json: what seisplotjs reads in miniSEED 3. Made with Node 20
// and seisplotjs 3.2.2, in an empty folder outside the project:
//
//     npm install seisplotjs@3.2.2
//     cp PROJECT/testdata/reference/miniseed3.mjs . && node miniseed3.mjs \
//         PROJECT/testdata/records/miniseed/borehole-version3.mseed > PROJECT/testdata/reference/miniseed3.json
//
// The library draws, too, and wants the classes of a browser.
import fs from 'node:fs';
import path from 'node:path';

for (const name of ['HTMLElement', 'HTMLDivElement', 'HTMLParagraphElement', 'HTMLCanvasElement', 'HTMLInputElement', 'Element', 'Node', 'Event',
  'CustomEvent', 'MutationObserver', 'ResizeObserver', 'SVGElement']) globalThis[name] ??= class {};
globalThis.document ??= { createElement: () => ({ style: {} }), addEventListener() {} };
globalThis.customElements ??= { define() {}, get() {} };
globalThis.window ??= globalThis;
const { mseed3 } = await import('seisplotjs');

const read = [];
for (const name of process.argv.slice(2)) {
  const data = fs.readFileSync(name);
  let offset = 0;
  for (const r of mseed3.parseMSeed3Records(data.buffer.slice(data.byteOffset, data.byteOffset + data.length))) {
    const h = r.header;
    read.push({
      file: path.basename(name), offset, id: h.identifier, encoding: h.encoding, crc: h.crc, start_us: Math.round(h.start.toMillis() * 1000), rate: h.sampleRate,
      samples: Array.from(r.decompress()),
    });
    offset += h.getSize() + h.dataLength; // the size is that of the headers
  }
}
process.stdout.write('{"library": "seisplotjs 3.2.2", "read": [\n' + read.map((r) => JSON.stringify(r)).join(',\n') + '\n]}\n');
