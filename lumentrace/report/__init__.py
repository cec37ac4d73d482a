"""Runs and worlds as text tables and as JSON objects: pure functions that trace nothing."""
