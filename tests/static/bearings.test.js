import assert from 'node:assert/strict';
import test from 'node:test';
import { labelled, tickAt } from '../../static/scripts/bearings.js';

const FRAME = { width: 200, height: 100 };
const MIDDLE = { x: 100, y: 50 };

for (const [bearing, side, x, y] of [
  [0, 'top', 100, 0], [90, 'right', 200, 50], [180, 'bottom', 100, 100], [270, 'left', 0, 50], [45, 'top', 150, 0], [135, 'bottom', 150, 100],
]) {
  test(`${bearing}° from the middle meets the frame at the ${side}`, () => {
    const tick = tickAt(FRAME, MIDDLE, bearing);
    assert.equal(tick.side, side);
    assert.ok(Math.abs(tick.x - x) < 1e-9 && Math.abs(tick.y - y) < 1e-9);
  });
}

test('a roof outside the frame has no ticks', () => {
  assert.equal(tickAt(FRAME, { x: -1, y: 50 }, 90), null);
});

test('of labels that would touch, the chosen one stays', () => {
  const ticks = [{ ...tickAt(FRAME, MIDDLE, 88) }, { ...tickAt(FRAME, MIDDLE, 90), chosen: true }, { ...tickAt(FRAME, MIDDLE, 270) }];
  assert.deepEqual([...labelled(ticks, 30)].map((one) => one.bearing).sort(), [270, 90].sort());
});
