"""Markers: the rules of the policy that say a patient may not be responding, one module per group.

A marker is a pure function of what was observed and its rule; it gives the spells in which it was met, over the
whole record up to `as_of`. An open spell is a marker met now.
"""
