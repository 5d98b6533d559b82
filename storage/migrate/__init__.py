"""Bringing an older store up to date, one transaction per step, with a backup first."""
