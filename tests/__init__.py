"""Tests of `pairing`: each test says in one sentence what must hold."""
