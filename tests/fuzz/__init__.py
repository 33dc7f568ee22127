"""Inputs bent at random, and what the program makes of them."""
