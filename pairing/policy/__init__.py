"""The programme's own rules: read, checked, and written from the records to start with."""
