import { describe, expect, test } from 'vitest';
import { isPointer, pointAt } from '../../src/mqtt/pointer.ts';

// RFC 6901 section 5
const DOCUMENT: unknown = JSON.parse(
  '{"foo":["bar","baz"],"":0,"a/b":1,"c%d":2,"e^f":3,"g|h":4,"i\\\\j":5,"k\\"l":6," ":7,"m~n":8}',
);

describe('JSON pointer', () => {
  test.each([
    ['', DOCUMENT],
    ['/foo', ['bar', 'baz']],
    ['/foo/0', 'bar'],
    ['/', 0],
    ['/a~1b', 1],
    ['/c%d', 2],
    ['/e^f', 3],
    ['/g|h', 4],
    ['/i\\j', 5],
    ['/k"l', 6],
    ['/ ', 7],
    ['/m~0n', 8],
  ])('RFC 6901 section 5: %j', (pointer, value) => {
    expect(pointAt(DOCUMENT, pointer)).toEqual({ found: true, value });
  });

  // JSON-Schema-Test-Suite @44401e0, draft2020-12/optional/format/json-pointer.json
  test.each(['a', '0', 'a/a', '#', '#/', '/foo/bar~', '/~2', '/~-1', '/~~', '/~0~'])(
    'is no pointer: %j',
    (text) => {
      expect(isPointer(text)).toBe(false);
      expect(pointAt(DOCUMENT, text)).toEqual({ found: false });
    },
  );

  test.each(['', '/foo//bar', '/foo/bar/', '/foo/-', '/~1~0~0~1~1'])('is a pointer: %j', (text) => {
    expect(isPointer(text)).toBe(true);
  });

  // RFC 6901 section 4: array index grammar; "-" names no existing element
  test.each(['/foo/01', '/foo/1e0', '/foo/-', '/foo/2', '/foo/-1', '/foo/length', '/foo/0/0'])(
    'names nothing: %j',
    (pointer) => {
      expect(pointAt(DOCUMENT, pointer)).toEqual({ found: false });
    },
  );

  test('decodes ~1 before ~0', () => {
    expect(pointAt({ '~1': 'right', '/': 'wrong' }, '/~01')).toEqual({ found: true, value: 'right' });
  });

  test.each(['/__proto__', '/constructor', '/toString'])('never walks the prototype: %j', (pointer) => {
    expect(pointAt({}, pointer)).toEqual({ found: false });
  });

  test('finds an own member whatever its name', () => {
    expect(pointAt(JSON.parse('{"__proto__":3}'), '/__proto__')).toEqual({ found: true, value: 3 });
  });
});
