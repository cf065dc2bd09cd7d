"""The pieces of the invented sample; run `make_sample.py` beside this folder."""
