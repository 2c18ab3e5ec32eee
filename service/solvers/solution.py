from service.balance.solution import *  # noqa: F403
