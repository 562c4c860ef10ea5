"""Choosing: one candidate per net, tied by banks and arrays; remedies where none will do."""
