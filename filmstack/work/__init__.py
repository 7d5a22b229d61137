"""Who does the work: blocks on a thread pool."""
