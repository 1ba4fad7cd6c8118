"""The kinds of pages: each module turns a feed, its parts and findings into drafts of sheets.

Depends on: drawing (model, flow, picture, texts) and what drawing may use.
"""
