"""Ctrl-C, and the signals by which a system asks a program to end."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from types import FrameType

SIGNALS = tuple(
    getattr(signal, name) for name in ("SIGINT", "SIGTERM", "SIGHUP") if hasattr(signal, name)
)


@dataclass
class Interrupts:
    """Whether the user has asked to stop."""

    seen: bool = False


@contextmanager
def watched_interrupts() -> Iterator[Interrupts]:
    """Turn every signal that asks for an end into KeyboardInterrupt, and remember it.

    A signal that whoever started the program has set to be ignored stays ignored.
    """
    interrupts = Interrupts()

    def stop(_number: int, _frame: FrameType | None) -> None:
        interrupts.seen = True
        raise KeyboardInterrupt

    if threading.current_thread() is not threading.main_thread():
        yield interrupts  # signals are the main thread's alone
        return
    usual = (signal.SIG_DFL, signal.default_int_handler)
    before = {n: signal.getsignal(n) for n in SIGNALS if signal.getsignal(n) in usual}
    for number in before:
        signal.signal(number, stop)
    try:
        yield interrupts
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
