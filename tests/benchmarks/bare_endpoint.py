"""The baseline of the HTTP benchmark: a bare endpoint that parses JSON, does two water flashes and answers."""

from __future__ import annotations

import threading

import CoolProp
from flask import Flask, jsonify, request
from flask.typing import ResponseReturnValue

app = Flask(__name__)
local = threading.local()


@app.get("/readyz")
def ready() -> ResponseReturnValue:
    return jsonify(status="ready")


@app.post("/v1/balances")
def balance() -> ResponseReturnValue:
    document = request.get_json()
    if not hasattr(local, "state"):
        local.state = CoolProp.AbstractState("HEOS", "Water")
    state = local.state
    state.update(CoolProp.PT_INPUTS, 41e5, 673.15)
    h = state.hmass()
    state.update(CoolProp.HmassP_INPUTS, h - 15e3 / (12 / 3.6), 11e5)
    return jsonify(title=document["title"], T=state.T(), h=h)
