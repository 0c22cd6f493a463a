"""What the tests of this folder share."""

from __future__ import annotations

import pytest

from explorer.commands import main


@pytest.fixture
def said(capsys):
    """Runs a command; code, what stdout said, what stderr said."""

    def run(*words: object) -> tuple[int, str, str]:
        capsys.readouterr()
        code = main([str(word) for word in words])
        out, err = capsys.readouterr()
        return code, out, err

    return run
