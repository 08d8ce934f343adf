import os
import pathlib

import pytest


@pytest.fixture(scope="session")
def shared():
    """The folder of published figures and recordings beside the checkout; CI always has it."""
    folder = pathlib.Path(__file__).resolve().parents[2] / "shared"
    if not (folder / "README.md").is_file():
        if os.environ.get("CI"):
            pytest.fail(f"{folder.name}/ is missing beside the checkout, and CI must not skip the checks that read it")
        pytest.skip("the reference data folder shared/ is not beside this checkout")
    return folder
