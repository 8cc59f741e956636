"""The commands: each reads, calls the library, and hands over."""
