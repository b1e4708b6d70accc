"""The exact leg, batched, and the closed forms of constant properties beside it."""
