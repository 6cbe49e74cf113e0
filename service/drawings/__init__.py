"""Drawings as SVG in millimetres of paper: what the pages and answers show of arms."""
