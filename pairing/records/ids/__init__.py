"""Ids: numbered, looked up and compared, for ten animals or ten million."""
