"""What all tests share: long runs are asked for by name, and where the measured spectra lie."""

from pathlib import Path

import pytest

CHECKOUT = Path(__file__).resolve().parent.parent


def pytest_collection_modifyitems(config, items):
    """Leave tests marked `full` out unless -m names them."""
    if "full" in (config.getoption("-m") or ""):
        return
    kept = [item for item in items if "full" not in item.keywords]
    config.hook.pytest_deselected(items=[item for item in items if "full" in item.keywords])
    items[:] = kept


@pytest.fixture(scope="session")
def checkout():
    return CHECKOUT


@pytest.fixture(scope="session")
def measured():
    """The folder of measured spectra beside the checkout; the test skips where it is absent."""
    folder = CHECKOUT.parent / "shared" / "real"
    if not folder.is_dir():
        pytest.skip("the measured spectra are not on this machine")
    return folder


@pytest.fixture(scope="session")
def practice():
    """The folder of practice cases beside the checkout; the test skips where it is absent."""
    folder = CHECKOUT.parent / "shared" / "practice" / "cases"
    if not folder.is_dir():
        pytest.skip("the practice cases are not on this machine")
    return folder


@pytest.fixture
def example(tmp_path, checkout):
    """A copy of the example run in an own folder."""
    import shutil

    folder = tmp_path / "first-run"
    shutil.copytree(checkout / "examples" / "first-run", folder)
    return folder
