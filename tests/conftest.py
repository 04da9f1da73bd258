"""What every test may ask for."""

from __future__ import annotations

from collections.abc import Iterator

import hypothesis
import numpy as np
import pytest

from tests.office import Office, require_office

# A worker script for another Python: it can't be imported here.
collect_ignore = ["office_worker.py"]

# Docstring examples print a NumPy float as a plain one, whatever the release of NumPy.
np.set_printoptions(legacy="1.25")

# A slow or busy machine is no fault of the project: no time limit on a single example. The examples are the same in
# every run, so that a failure can be repeated.
hypothesis.settings.register_profile("stripcheck", deadline=None, derandomize=True, max_examples=150)
hypothesis.settings.load_profile("stripcheck")


@pytest.fixture(scope="session")
def office() -> Iterator[Office]:
    """One LibreOffice for the whole test run (with pytest-xdist: one for each process)."""
    require_office()
    with Office() as running:
        yield running
