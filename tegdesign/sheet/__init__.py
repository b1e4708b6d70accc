"""Results as words, tables, figures and pages; computes nothing an engineer would call a result."""
