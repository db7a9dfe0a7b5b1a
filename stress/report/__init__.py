"""One renderer each: terminal, JSON, CSV, HTML. Decides nothing, computes nothing."""
