"""Sequencers: from listed states to wanted drives, and proof of recovery from every state.

`steps` expands a sequence to one-relay steps and derives what coils and loads must do, `memory`
adds relays where a state occurs twice with different wants, `pattern` chooses relays where only
the loads are known.  `recovery` proves by exhausting the state space where relays end up.
"""
