"""Render a result; judge nothing."""
