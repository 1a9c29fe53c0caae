"""Audit a text corpus against a subword vocabulary, before any compute is paid for."""
