"""Findings to text and JSON."""
