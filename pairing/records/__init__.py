"""Records as keepers have them: read, never changed, and every doubt explained."""
