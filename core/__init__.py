"""Computation only: no Qt, no SQL, no files, no clock. What a function needs is passed in."""
