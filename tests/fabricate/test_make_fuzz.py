"""A thousand accepted jobs through ``make``: a proved package or a refusal in words, and nothing else ever."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner

from fabricate.command import app
from fabricate.job import Job, job_text


@pytest.mark.slow
@settings(max_examples=1000, deadline=None, suppress_health_check=list(HealthCheck))
@given(job=st.from_type(Job))
def test_an_accepted_job_gives_a_proved_package_or_a_refusal(
    job: Job, tmp_path_factory: pytest.TempPathFactory
) -> None:
    folder = tmp_path_factory.mktemp("fuzz")
    try:
        _made_or_refused(job_text(job), folder)
    finally:
        shutil.rmtree(folder)


def _made_or_refused(text: str, folder: Path) -> None:
    (folder / "job.toml").write_text(text, encoding="utf-8")
    result = CliRunner().invoke(app, ["make", str(folder / "job.toml"), "-o", str(folder / "out")])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    # 1 would be a file of our own that fails its proof.
    assert result.exit_code in (0, 2), f"{result.stdout}\n{text}"
    assert (folder / "out").exists() == (result.exit_code == 0)
    if result.exit_code == 2:
        assert result.stdout == ""
        assert "; allowed: " in result.stderr
        assert "; do: " in result.stderr
