"""Routine topics of the operations room: traffic, pilots, berths, soundings and the watch."""

from __future__ import annotations

from vanner.sources.demo.topic import Topic, topic

MARINE: dict[str, Topic] = {
    "traffic": topic(
        """
{hm} {ship} inbound ::
 {hm} {ship} inbound, passed {buoy} at {num 5 11} knots, bound for {berth} with {cargo}, draught
 {num 3 8} metres, {num 6 14} crew.
{hm} {ship} outbound ::
 {hm} {ship} outbound from {berth}, [singled up|last line] at {moment}, next port {town}, nothing
 to declare.
{hm} {ship} at anchor ::
 {hm} {ship} anchored {num 2 6} cables from {buoy}, {num 2 6} shackles out, waiting for
 [tide|berth| orders|stores].
        """,
        """
{ship2} asked to hold at {buoy2} until clear and complied without discussion.
Position agrees with the track on the display; voice on channel {num 10 14} loud and clear.
12> {tug} [stood by|made fast aft|escorted to the turning basin] and was released at {moment2}.
Yacht {num 3 9} metres under sail reminded to keep out of the channel; skipper courteous.
Fishing boats working [north|south|west] of {buoy2}, {num 2 11} in all, giving way as usual.
Wind {wind}, sea {seastate}, visibility {num 3 12} miles, light traffic expected until {moment3}.
Master asked for the correct spelling of {town} for his papers; supplied.
Agent {firm} informed by telephone; lorries ordered for {moment3}.
Passage plan received late, checked against the draught board and found in order.
Underkeel clearance computed at {num 1 4} metres with the tide at {gauge}.
        """,
    ),
    "pilotage": topic(
        """
{hm} {pilot} on board {ship} ::
 {hm} {pilot} boarded {ship} near {buoy}, ladder rigged on the [port|starboard] side and found in
 good order.
Pilot order {ship} ::
 Pilot order for {ship}, {hm} at {buoy}, [confirmed|put back one hour|brought forward]; {pilot} on
 the roster.
{hm} {pilot} off {ship} ::
 {hm} {pilot} disembarked from {ship} off {buoy} after an uneventful passage from {berth}.
        """,
        """
Launch crew reports {seastate} sea at the boarding ground and a {wind} wind.
{pilot2} rests until {moment} under the working hours rule and is next on turn.
Ship's engine tested ahead and astern before {buoy2}; response satisfactory.
Heaving line landed in the launch at the second attempt, no comment from the bridge.
{tug} ordered for the swing off {berth2}, {tug2} kept as a spare.
Master speaks little; exchange of cards done by pointing, both sides content.
Bill signed for account of {firm}; copy in the tray.
Launch returned to the station at {moment2}, fuel {num 30 90} per cent, one fender to be patched.
Draught fore and aft read as declared, difference {num 1 9} centimetres.
        """,
    ),
    "berths": topic(
        """
{berth}: {ship} alongside ::
 {hm} {ship} all fast at {berth}, {num 4 8} lines and two springs, gangway down, discharge of
 {cargo} to begin at {moment}.
Berth plan {hm}: {ship}, {ship2} ::
 Berth plan as of {hm}: {ship} stays at {berth} until {cargo} is out, {ship2} takes {berth2} after.
{ship} shifting to {berth2} ::
 {hm} {ship} to shift from {berth} to {berth2} along the quay with {tug} and the mooring gang.
        """,
        """
Mooring gang of {num 4 8} under foreman {person} attended and was stood down at {moment2}.
Bollard {num 2 88} shows fresh paint scrape, photographed, nothing structural.
{ship3} next in turn if {firm} confirms the cargo papers by {moment3}.
Rat guards fitted, garbage skip ordered, fresh water {num 20 160} tonnes on request.
Shore ladder replaced at {berth3}; old one sent to the yard for welding.
Harbour master's deputy has seen the plan and initialled it.
{crane} booked from {moment3}, hold {num 1 4} first, rain covers ready.
Chief mate asks for quiet on the quay before six; told this is a port.
Ship's cook enquired about {fish}; directed to the auction hall.
        """,
    ),
    "soundings": topic(
        """
Soundings off {berth} ::
 Survey launch ran {num 6 40} lines off {berth} on {weekday}; least depth {num 4 9} metres, {num 1
 9} decimetres [more|less] than the last chart.
Dredger programme, {berth} ::
 Dredger worked {num 3 11} loads from the approach to {berth} and dumped at the spoil ground by
 {hm}.
{buoy} checked ::
 {buoy} inspected at {hm}: light {num 3 9} seconds, mooring chain worn {num 5 20} per cent, top
 mark straight.
        """,
        """
Soft mud over clay as usual; the echo sounder was calibrated with a bar check.
Notice to mariners number {num 10 140} drafted for the harbour master's signature.
Cormorants have been whitewashing the lantern again; cleaned with brush and patience.
Next run off {berth2} when the tide serves, about {moment}.
Siltation near {buoy2} is within the allowance for the quarter.
Tender crew {person} and {person2} report all moorings on position.
Tide reduced by {gauge}; difference to the prediction {num 1 14} centimetres.
Dredger asks for {num 2 9} cubic metres of fuel and new bucket pins.
Chart extract filed with the surveyor; a paper copy hangs in the corridor.
        """,
    ),
    "tides": topic(
        """
{gauge}: reading {hm} ::
 {hm} {gauge} reads {num 1 5} metres {num 1 9} decimetres, {num 1 19} centimetres [over|under]
 prediction, wind {wind}, {sky}.
Met report {hm}: {sky}, {wind} ::
 Weather at {hm}: {sky}, wind {wind}, sea {seastate} at the bar, pressure {num 988 1031}
 hectopascals.
        """,
        """
Outlook received from Harrowness and posted: {sky2}, wind {wind2}, no warnings in force.
{gauge2} agrees within {num 1 6} centimetres; clocks compared at {moment}.
Stilling well flushed, float moves freely, one crab evicted.
Air {num 2 19} degrees, water {num 4 15} degrees, dew on the windows of the tower.
Visibility {num 4 14} miles, church at {village} clearly seen.
Ebb runs {num 1 3} knots past {buoy}, as tabled.
Battery of the telemetry box at {num 60 99} per cent, signal good.
Forecast for {weekday} {sky3}; no extra moorings advised.
Swell at the Outer Mole under half a metre, period {num 4 9} seconds.
        """,
    ),
    "handover": topic(
        """
Watch change {hm}: {officer} to {officer2} ::
 {hm} {officer2} took over the watch from {officer}, {crew}, all desks manned, log read and signed.
Handover {hm}, {crew} ::
 Shift change at {hm}: {crew} relieved, {num 2 11} ships alongside, {num 0 5} at anchor, next
 arrival {ship} at {moment}.
        """,
        """
Open points: [lamp|door|gate] at {berth}, call back to {firm}, key of {substation} still with the
 electrician.
Standing orders unchanged; night order book initialled by both officers.
Radio check on channels {num 9 12} and {num 13 16} satisfactory, spare handset charged.
Kettle descaled by the outgoing shift, for which thanks.
{pilot} next on turn, {tug} at {num 10 30} minutes notice, {tug2} in maintenance.
Visitors' book: {person} of {firm2}, signed out at {moment2}.
Keys counted, {num 20 44} of {num 44 46} on the board, the rest accounted for.
Works planned: {crane} grease round, {pump} test run, window cleaner on the tower.
Duty roster for {weekday} pinned up; {officer3} swaps with {officer4}.
        """,
    ),
}
