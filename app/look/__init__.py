"""Marks drawn by the project, for the style sheet."""
