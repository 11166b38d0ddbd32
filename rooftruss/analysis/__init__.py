"""Effects: combinations, frame analysis, envelope, zero-force inspection."""
