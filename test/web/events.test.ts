import { expect, test } from 'vitest';
import { createEventParser, type ServerEvent } from '../../schema/wire/event-stream.ts';

function parse(pieces: string[]): ServerEvent[] {
  const events: ServerEvent[] = [];
  const push = createEventParser((event) => events.push(event));
  for (const piece of pieces) push(piece);
  return events;
}

// The streams of the first two tests are examples of WHATWG HTML, "Interpreting an event stream" (written from memory).
test('comments are skipped, the id stays until it is changed, one space after the colon is dropped', () => {
  const stream = ': test stream\n\ndata: first event\nid: 1\n\ndata:second event\nid\n\ndata:  third event\n\n';
  expect(parse([stream])).toEqual([
    { id: '1', data: 'first event' },
    { id: '', data: 'second event' },
    { id: '', data: ' third event' },
  ]);
});

test('several data lines are joined, an unfinished event is not given', () => {
  expect(parse(['data: YHOO\ndata: +2\ndata: 10\n\ndata: lost'])).toEqual([{ id: undefined, data: 'YHOO\n+2\n10' }]);
});

test('any line ends, cut anywhere, give the same events', () => {
  const stream = 'event: status\r\nid: 7\r\ndata: {"a":1}\r\n\r\nid: 8\rdata: x\r\rdata: y\n\n';
  const whole = parse([stream]);
  expect(whole).toEqual([
    { id: '7', data: '{"a":1}' },
    { id: '8', data: 'x' },
    { id: '8', data: 'y' },
  ]);
  for (let cut = 1; cut < stream.length; cut++) expect(parse([stream.slice(0, cut), stream.slice(cut)])).toEqual(whole);
  expect(parse([...stream])).toEqual(whole);
});
