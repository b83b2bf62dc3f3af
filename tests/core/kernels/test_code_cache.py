"""The folder for machine code follows the sources and what the user chose."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from gainbench.kernels import code_cache as module
from gainbench.kernels.code_cache import code_cache


def test_a_chosen_folder_is_used(monkeypatch, tmp_path):
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    assert code_cache("linalg").parent == tmp_path / "gainbench" / "kernels"


@pytest.mark.skipif(sys.platform in ("win32", "darwin"), reason="the rule of other systems is another")
def test_else_the_users_cache_folder(monkeypatch, tmp_path):
    monkeypatch.delenv("NUMBA_CACHE_DIR", raising=False)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    assert code_cache("linalg").parent == tmp_path / "gainbench" / "kernels"


def test_a_change_in_what_a_kernel_imports_is_another_folder(monkeypatch, tmp_path):
    monkeypatch.setattr(module, "__file__", str(tmp_path / "code_cache.py"))
    (tmp_path / "top.py").write_text("from gainbench.kernels.middle import x\n", encoding="utf-8")
    (tmp_path / "middle.py").write_text("from gainbench.kernels.bottom import x\n", encoding="utf-8")
    (tmp_path / "bottom.py").write_text("x = 1\n", encoding="utf-8")
    (tmp_path / "other.py").write_text("x = 1\n", encoding="utf-8")
    first = code_cache("top")
    (tmp_path / "other.py").write_text("x = 2\n", encoding="utf-8")
    assert code_cache("top") == first
    (tmp_path / "bottom.py").write_text("x = 2\n", encoding="utf-8")
    assert code_cache("top") != first


def test_no_numba_is_loaded_to_tell():
    code = "import sys, gainbench.kernels.code_cache as c; c.code_cache('linalg'); sys.exit('numba' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], cwd=Path.home(), check=False).returncode == 0
