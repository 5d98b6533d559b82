"""What tests of the application share: no test leaves its policy in the names of the next."""

from collections.abc import Iterator

import pytest

from app.policy.names import use
from core.judgement.policy import shipped_policy


@pytest.fixture(autouse=True)
def shipped_names() -> Iterator[None]:
    """Names say the shipped limits until a test opens a store with others."""
    yield
    use(shipped_policy())
