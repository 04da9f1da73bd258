"""Ends a command by SIGKILL at random moments of its run, as a power cut would, and looks at what is left."""

from __future__ import annotations

import random
import subprocess
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field


@dataclass
class Kills:
    """What became of the runs.

    ``duration`` [s]: the shortest of those that came to their end, ``moments`` [s]: when the others were killed,
    ``finished``: how many came to their end before their moment.
    """

    duration: float
    moments: list[float] = field(default_factory=list)
    finished: int = 0


def kill_at_random(
    command: Sequence[str], check: Callable[[], None], times: int, *, seed: int = 0, ready: bool = False,
    prepare: Callable[[], None] | None = None, patience: float = 300.0,
) -> Kills:  # fmt: skip
    """Run a command ``times`` times, kill each run at a random moment of its duration, and call ``check`` after each.

    ``check`` raises where something is not as it must be. ``ready``: the command writes a line when its start-up is over,
    and only what comes after it is timed, so that every kill hits the work itself. ``prepare`` is called before each run.
    ``patience`` [s] is how long one run may take at the most. The same seed gives the same shares of the duration.
    """
    moments = random.Random(seed)
    kills = Kills(_run(command, ready, prepare, patience)[1])
    check()
    for _ in range(times):
        killed, moment = _run(command, ready, prepare, moments.uniform(0.0, kills.duration), kill=True)
        if killed:
            kills.moments.append(moment)
        else:
            kills.finished += 1
            kills.duration = min(kills.duration, moment)
        check()
    return kills


def _run(
    command: Sequence[str], ready: bool, prepare: Callable[[], None] | None, most: float, kill: bool = False
) -> tuple[bool, float]:
    """Whether the run was killed after ``most`` seconds, and how long it took."""
    if prepare is not None:
        prepare()
    with subprocess.Popen(command, stdout=subprocess.PIPE if ready else subprocess.DEVNULL, stderr=subprocess.PIPE) as process:
        if ready:
            assert process.stdout is not None and process.stdout.readline(), "the command ended before it was ready"
        start = time.monotonic()
        try:
            _, said = process.communicate(timeout=most)
        except subprocess.TimeoutExpired:
            process.kill()
            process.communicate()
            assert kill, f"{command[0]} took longer than {most:.0f} s"
            return True, time.monotonic() - start
    assert process.returncode == 0, said.decode(errors="replace")
    return False, time.monotonic() - start
