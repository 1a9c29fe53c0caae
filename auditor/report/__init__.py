"""Renderers: they turn a table of figures into text and write nothing by themselves."""
