"""Tables as files, streams and databases hold them: turned into text, not yet understood."""
