"""When to poll a source next: its interval while all is well, further apart while it fails."""

from __future__ import annotations

import random

from vanner import clock

_SPREAD = 0.1
_LONGEST_PAUSE_S = clock.HOUR_S
_LONGEST_REQUEST_S = clock.DAY_S


def next_poll_s(
    now_s: float,
    every_s: float,
    failures: int,
    rng: random.Random,
    retry_at_s: float | None = None,
) -> float:
    """The moment of the next poll, in Unix seconds.

    Without a failure it is `every_s` later and up to a tenth of that more, so that sources
    which began together spread out. After n failures in a row the pause is drawn evenly from
    the upper half of min(every_s * 2^n, one hour): it doubles, and sources that one outage
    stopped do not come back all at once. It is never less than `every_s`, except that a source
    polled less often than hourly is tried again after an hour.

    Args:
        now_s: The time of the poll that has just ended.
        every_s: The source's interval, above zero.
        failures: Failures in a row; 0 after a success.
        rng: Where the jitter comes from.
        retry_at_s: The time before which the source asked not to be polled; it is honoured
            up to one day ahead.
    """
    if failures <= 0:
        pause_s = every_s * (1 + _SPREAD * rng.random())
    else:
        # 2**30 intervals are beyond any longest pause; a larger power would overflow at last.
        longest_s = min(every_s * 2.0 ** min(failures, 30), _LONGEST_PAUSE_S)
        pause_s = longest_s * (0.5 + 0.5 * rng.random())
        pause_s = max(pause_s, min(every_s, _LONGEST_PAUSE_S))
    if retry_at_s is None:
        return now_s + pause_s
    return max(now_s + pause_s, min(retry_at_s, now_s + _LONGEST_REQUEST_S))
