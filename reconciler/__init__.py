"""Reconciler: what a bond's own terms say must be paid, held against what broker, desk and bank told.

A map of the house, from the door downwards; imports only ever point down.

    __main__     the door: the window, or a headless command
    window       Qt: models over tables, pages, dialogs, drawings
    command      headless: arguments in, text and exit codes out
    procedures   what people do, as use cases; the one corridor between the faces above and the rooms below
    intake       files in: layouts, recognising, reading, cells, identifiers, the morning folder
    expected     what the terms say must be paid: settlements, coupons, redemptions, entitlement
    matching     pairing what was told with what was expected: trades, cash, combinations
    breaks       finding differences, naming causes, what is at stake
    exports      CSV and XLSX of any table
    bonds        arithmetic on arrays: calendars, day counts, schedules, accrual, pricing, settlement
    records      the tables that steps hand on: columns, types, units, meaning
    settings     money  problems  resources    what everything above may use
"""

__version__ = "0.1.0"
