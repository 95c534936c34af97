"""How the patient lies, and points in patient axes; free of numerical libraries."""

from __future__ import annotations

from enum import StrEnum

Point = tuple[float, float, float]
"""A point or displacement in patient axes (DICOM: x left, y posterior, z superior), cm."""


class PatientPosition(StrEnum):
    """Patient Position (0018,5100) as in DICOM: head or feet first, supine or prone."""

    HFS = "HFS"
    HFP = "HFP"
    FFS = "FFS"
    FFP = "FFP"
