"""A department of its own for each test."""

from __future__ import annotations

import shutil
from typing import TYPE_CHECKING

import pytest
from department import department_file
from program import Program

if TYPE_CHECKING:
    from pathlib import Path

__all__ = ["department_file"]


@pytest.fixture
def department(department_file: str, tmp_path: Path) -> Program:
    """Give the program on a practice database with both courses approved, before treatment."""
    return Program(shutil.copy(department_file, tmp_path), tmp_path)
