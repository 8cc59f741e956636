"""Any bytes at all through the reading of records: refused in plain words, or read whole."""
