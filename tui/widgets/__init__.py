"""Parts that several screens use."""
