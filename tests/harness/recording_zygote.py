"""Fork a recorder, kill it after a while, and again. Usage: recording_zygote.py URL.

Each line on standard input, ``COURSE SECONDS``, makes one recorder, which records fraction after
fraction until it is killed. On standard output the recorder says ``start`` before each record, then
``ack ENTRY``, or ``lost`` when the database went away, or ``failed`` and why; ``dead`` follows when
it is gone.
"""

from __future__ import annotations

import os
import signal
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from department import recorded

from featherlog.actions.database import status
from featherlog.errors import StoreError

DAY = "2026-03-02"


def say(text: str) -> None:
    """Write a line at once: what was said is out even if the next instant kills."""
    os.write(1, f"{text}\n".encode())


def record_without_end(url: str, key: str) -> None:
    while True:
        say("start")
        try:
            done = recorded(url, key, DAY, position="A", reason="harness")
        except StoreError:
            say("lost")
            return
        say(f"ack {done.entry}")


def kill_one(url: str, key: str, seconds: float) -> None:
    recorder = os.fork()
    if recorder == 0:
        try:
            record_without_end(url, key)
        except BaseException as error:  # noqa: BLE001 - whatever it is, the test is to be told
            say(f"failed {error!r}")
        finally:
            os._exit(0)
    signal.sigtimedwait({signal.SIGCHLD}, seconds)
    os.kill(recorder, signal.SIGKILL)
    os.waitpid(recorder, 0)
    signal.sigtimedwait({signal.SIGCHLD}, 0)  # its end is noted, and must not end the next wait
    say("dead")


def main() -> None:
    url = sys.argv[1]
    status(url)  # loads the driver here and not in every recorder
    signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGCHLD})
    say("ready")
    for line in sys.stdin:
        key, seconds = line.split()
        kill_one(url, key, float(seconds))


if __name__ == "__main__":
    main()
