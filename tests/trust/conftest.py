import pytest

from explorer.chemistry import System


@pytest.fixture(scope="session")
def system() -> System:
    return System()
