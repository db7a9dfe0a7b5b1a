"""Source text and what can be wrong with it: spans, errors with a caret, numbers, quantities."""
