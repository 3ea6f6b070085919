"""Questions that are answered before anything else goes on; the hold key works in all of them."""
