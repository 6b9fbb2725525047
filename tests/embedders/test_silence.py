"""Running a network tells nobody."""

import os
import subprocess
import sys
from pathlib import Path

from curator.embedders import building

_RUN = """
from curator.embedders import building
from curator.embedders.session import open_session
open_session(building.detector_path(), threads=1)
"""


def test_a_session_leaves_no_trace_in_the_users_home(tmp_path: Path) -> None:
    building.prepare()
    known = {name: value for name, value in os.environ.items() if name != "ORT_DISABLE_TELEMETRY"}
    homes = {name: str(tmp_path) for name in ("HOME", "XDG_CACHE_HOME", "XDG_DATA_HOME", "XDG_CONFIG_HOME")}
    environment = {**known, **homes, "PAIRWRIGHT_CACHE": str(building.cache_folder())}
    subprocess.run([sys.executable, "-c", _RUN], env=environment, check=True)
    assert list(tmp_path.rglob("*")) == []
