"""Rows on a cluster of a scheduler and two workers on this machine, started by the test as a user would."""

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from contextlib import contextmanager

import pytest

from axicfd.case.write import to_toml
from axicfd.cli import app, exits
from axicfd.errors import AxicfdError
from axicfd.output.sweep import read_sweep, sweep
from axicfd.variants.cluster import Certificates, connected, is_exposed
from tests.variants.test_runner import BASE

PLAN = """\
case = "base.toml"
[[vary]]
key = "stream.water.reynolds"
from = 10
to = 80
count = 8
"""


@pytest.mark.parametrize(
    "address, exposed",
    [
        ("tcp://127.0.0.1:8786", False),
        ("127.0.0.1:8786", False),
        ("tcp://localhost:8786", False),
        ("tcp://[::1]:8786", False),
        ("tls://10.0.0.5:8786", False),
        ("tcp://10.0.0.5:8786", True),
        ("10.0.0.5:8786", True),
        ("tcp://head-node:8786", True),
        ("ws://10.0.0.5:8786", True),
    ],
)
def test_only_loopback_and_encrypted_addresses_are_safe(address, exposed):
    assert is_exposed(address) is exposed


@pytest.fixture
def plan(tmp_path):
    (tmp_path / "base.toml").write_text(to_toml(BASE))
    (tmp_path / "plan.toml").write_text(PLAN)
    return tmp_path / "plan.toml"


@contextmanager
def cluster(folder, *tls: str):
    """(address, processes of the two workers)"""
    pytest.importorskip("distributed")
    path = os.pathsep.join(filter(None, sys.path))
    environment = os.environ | {"PYTHONPATH": path, "OMP_NUM_THREADS": "1", "NUMBA_NUM_THREADS": "1"}
    quiet = {"env": environment, "cwd": folder, "stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL}
    told = folder / "scheduler.json"
    local = ["--host", "127.0.0.1", "--dashboard-address", "127.0.0.1:0", *tls]
    command = [sys.executable, "-m", "distributed.cli.dask_scheduler", "--port", "0", "--scheduler-file", str(told)]
    processes = [subprocess.Popen([*command, *local], **quiet)]
    try:
        begun = time.monotonic()
        while not told.exists() or not told.read_text().strip():
            assert processes[0].poll() is None and time.monotonic() - begun < 60.0
            time.sleep(0.1)
        address = json.loads(told.read_text())["address"]
        command = [
            sys.executable,
            "-m",
            "distributed.cli.dask_worker",
            address,
            "--nthreads",
            "1",
            "--no-nanny",
            *local,
        ]
        processes += [subprocess.Popen(command, **quiet) for _ in range(2)]
        yield address, processes[1:]
    finally:
        for process in reversed(processes):
            process.kill()
            process.wait()


@pytest.mark.slow
def test_the_same_plan_runs_on_a_cluster_and_a_dead_worker_costs_no_other_row(plan):
    here = sweep(plan, workers=2)
    with cluster(plan.parent) as (address, workers):
        with connected(address) as executor:
            killed = []

            def kill_one(event):
                if event.done == 3 and not killed:
                    killed.append(os.kill(workers[0].pid, signal.SIGKILL))

            there = sweep(plan, plan.parent / "there", executor=executor, on_progress=kill_one)
    assert killed and workers[0].returncode == -signal.SIGKILL
    assert there["status"] == here["status"] == ("solved",) * 8
    name = "stream.water.outlet_temperature_K"
    assert there[name] == pytest.approx(here[name], abs=1e-9)


@pytest.mark.slow
def test_encrypted_it_runs_unchanged_and_nobody_gets_in_in_plain(plan, monkeypatch, capsys):
    if shutil.which("openssl") is None:
        pytest.skip("openssl makes the certificate")
    folder = plan.parent
    monkeypatch.chdir(folder)
    subprocess.run(
        ["openssl", "req", "-x509", "-newkey", "rsa:2048", "-nodes", "-days", "2", "-subj", "/CN=sweep",
         "-keyout", "key.pem", "-out", "cert.pem"],
        check=True, capture_output=True,
    )  # fmt: skip
    cert, key = str(folder / "cert.pem"), str(folder / "key.pem")
    tls = "--protocol", "tls", "--tls-ca-file", cert, "--tls-cert", cert, "--tls-key", key
    with cluster(folder, *tls) as (address, _):
        assert address.startswith("tls://")
        own = ["--tls-ca", cert, "--tls-cert", cert, "--tls-key", key]
        assert app.main(["sweep", "plan.toml", "--out", "out", "--cluster", address, *own]) == exits.SOLVED
        assert "warning" not in capsys.readouterr().err
        monkeypatch.setattr("axicfd.variants.cluster.WAIT", 3)
        with pytest.raises(AxicfdError, match="cannot be reached"), connected(address.replace("tls", "tcp")):
            pass
        with pytest.raises(AxicfdError, match="needs certificates"), connected(address):
            pass
    assert read_sweep(folder / "out").counts == {"solved": 8}


@pytest.mark.slow
def test_a_scheduler_that_is_not_there_is_told(monkeypatch):
    pytest.importorskip("distributed")
    monkeypatch.setattr("axicfd.variants.cluster.WAIT", 2)
    with pytest.raises(AxicfdError, match="cannot be reached"), connected("tcp://127.0.0.1:9"):
        pass
    with pytest.raises(AxicfdError, match="cannot be reached"), connected("no-scheme://x", Certificates("a", "b", "c")):
        pass
