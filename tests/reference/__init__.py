"""An independent implementation of the rate laws, written from the formulas alone.

It shares no code with the engine. Slow on purpose: readable first.
"""
