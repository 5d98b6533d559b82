"""Judgement: anchors and responses, trends, scores, the policy, markers, due items, levers."""
