"""Frames, rotations and field edge planes: where a jaw's edge lies in the patient."""
