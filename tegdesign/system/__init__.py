"""Source and sink, load, and the operating point of a batch of generators."""
