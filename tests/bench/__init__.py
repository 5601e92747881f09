"""Measuring on real code: `python -m tests.bench`. A command, not a test: nothing here is timed by pytest."""
