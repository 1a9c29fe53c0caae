"""Integer counts that merge in any order; nothing here knows a library that encodes."""
