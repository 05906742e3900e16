"""Draws a report on paper. It computes nothing: every number comes as text, charts come as shares and proportions."""
