"""The drawing room: charts from ready arrays and ready words. It computes nothing clinical.

Importing this package costs nothing; import the module you draw with.

    app.chart.shapes        what to draw: frozen dataclasses
    app.chart.lanes         WardLanes(theme): the ward view; set_spec(LanesSpec)
    app.chart.stack         PanelStack(theme): ribbon and panels on one clock; set_spec(StackSpec)
    app.chart.acid_base_map AcidBaseMap(theme): pH against PaCO2; set_spec(MapSpec)
    app.chart.render        pictures without a screen: image_of, svg_of, pdf_of
    app.chart.time_ticks    labels of a clock in local wall time; moment_word, date_word, time_word
    app.chart.marks         the shapes themselves, for icons beside words elsewhere in the window

Clock
    Every instant that goes in or comes out is int64 microseconds UTC. Inside a PanelStack the x coordinate
    is float seconds since the stack's origin (the spec's `start`): a double keeps microseconds over a century
    of seconds, where epoch microseconds as pixels of a transform would not.

Signals
    They carry plain Python objects (`object`), for a C++ int would cut an instant short. Connect bound
    methods: a lambda on a long-lived signal keeps its object alive.

    PanelStack  instant_changed(int | None)     the instant under the crosshair
                range_changed(int, int)         the window in view
                reduced_changed(bool)           data are reduced to extremes per pixel
                bracket_activated(Bracket), tick_activated(Tick)
                methods: set_window, go_to, go_home, go_now, show_all, zoom, point_at,
                readings_at(instant), settings_at(instant)
    WardLanes   selection_changed(str, LaneItem | None)   lane key, item
                lane_activated(str), item_activated(str, LaneItem), hovered(str)
    AcidBaseMap hovered(str), gas_activated(MapGas)
"""
