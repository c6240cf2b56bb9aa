"""Routine topics of the operations room: cranes, pumps, power, computers, gates and rounds."""

from __future__ import annotations

from vanner.sources.demo.topic import Topic, topic

TECHNICAL: dict[str, Topic] = {
    "cranes": topic(
        """
Ticket {ticket}: {crane}, {hoist} ::
 Ticket opened {hm} by the driver of {crane}: {hoist} [noisy|stiff|out of adjustment], lifting
 continues at reduced speed.
{crane} back in service ::
 {crane} back in service at {hm} after {hoist} was [replaced|reset|cleaned]; test lift of {num 5
 30} tonnes without remark.
{crane}: monthly inspection ::
 Monthly inspection of {crane} at {berth}: {hoist} within limits, {hoist2} to be watched.
        """,
        """
13> Fitter {person} estimates {num 1 6} hours; part {num 1000 9899} is in the store.
Wind at the jib {num 4 16} metres a second, below the limit for work.
23> Replaced one {part} and one {part2} while the cover was open.
1> {ship} continues with the ship's own gear in the meantime.
1> Driver says it sounds like a {bird}; recording attached.
Grease round done, {num 8 40} points, drip tray emptied.
Certificate runs until the end of the quarter; surveyor notified.
Spare {hoist3} ordered from {firm}, delivery promised for {weekday}.
Please label the cabinet key, it was with {officer} again.
        """,
    ),
    "pumps": topic(
        """
{pump}: weekly test ::
 {hm} {pump} started for its weekly test, {num 10 40} minutes, current {num 12 48} amperes, no
 vibration to speak of.
{pump} tripped and reset ::
 {pump} tripped at {hm} on the thermal relay, reset by {person} and running again since.
Ticket {ticket}: {pump} ::
 Ticket: {pump} takes {num 2 9} minutes longer than usual to empty the sump; {part} suspected.
        """,
        """
Level in the sump {num 20 140} centimetres, alarm float tested by hand.
Screen cleared of weed, a glove and one {object}.
Changed the {part2}; old one kept for the fitter to look at.
Duty pump is now {pump2}, standby as marked on the board.
Flow meter reads {num 40 320} cubic metres an hour, in line with last week.
Oil sample taken, colour like weak tea, sent to {firm}.
Insulation measured {num 20 400} megohms, dry and good.
3> Closing this ticket unless the level says otherwise before {moment2}.
Cabinet door at {substation} would not latch; {part3} to be ordered.
        """,
    ),
    "power": topic(
        """
Shore power at {berth} connected ::
 {hm} shore power connected for {ship} at {berth}, {num 60 240} amperes, phase rotation checked
 before closing.
Quay lighting near {berth} ::
 Lamp round {hm}: {num 2 6} lamps out near {berth}, mast {num 1 60}, replaced from the basket lift.
{substation}: switching ::
 {substation} switched over to feeder {num 1 4} for maintenance at {hm}, restored by {moment}, no
 customer noticed.
        """,
        """
Transformer temperature {num 30 58} degrees, hum normal, silica gel still blue.
Permit number {num 100 980} issued to {firm} and returned signed.
Meter reading {num 10000 98000}, difference plausible, entered in the book.
One {part} found loose in the pillar at {berth2} and tightened.
Emergency diesel ran {num 10 30} minutes on load, tank {num 50 98} per cent.
Photocell was covered by gull droppings, hence the lights at noon; wiped.
Electrician {person} asks that nobody dry socks in {substation2}.
Earth leakage test passed on {num 4 12} outlets, one label missing.
Next thermographic round planned for {weekday}.
        """,
    ),
    "computers": topic(
        """
Ticket {ticket}: {machine} ::
 Ticket {ticket} opened {hm}: {machine} [does not answer|shows yesterday's page|prints half lines]
 since the last update.
Restart of {machine} ::
 {machine} restarted at {hm} by the duty technician; service normal from {moment}, cause [a full
 disk| a loose plug|an expired password|unknown].
Request: access for {person} ::
 Access request for {person} of {firm}: read rights to the berth plan, valid until {weekday}.
        """,
        """
12> Asked the user to turn it off and on; user had already done so twice.
1> Log kept for {num 2 9} days, nothing unusual besides {machine2}.
12> Patch cable number {num 2 96} exchanged, link light steady.
Backup of the night finished before {moment2}, {num 40 380} gigabytes, verified.
12> Workaround: use the terminal in the corridor, password on request only.
1> Priority lowered to {num 3 4} by {officer} as there is a spare.
Waiting for {firm2}, who promise a call back before {moment3}.
12> New {part} fitted to {machine3}; fan noise gone.
User satisfied, says so in capitals.
Licence count {num 12 60} of {num 61 64}, no action.
        """,
    ),
    "gates": topic(
        """
{gate}: {vehicle} for {berth} ::
 {hm} {gate}: {vehicle} of {firm} with {cargo} for {berth} [turned back for want of papers|admitted
 after a call|parked in the bay to wait].
{gate}: barrier ::
 Barrier at {gate} stayed [up|down] from {moment} to {hm}; cause a worn {part}, replaced by the
 porter.
{gate}: traffic count {hm} ::
 {gate} counted {num 20 240} vehicles by {hm}, of which {num 2 30} for {ship}.
        """,
        """
13> Weighbridge ticket differs by {num 20 90} kilos; driver shown the scale and persuaded.
Badge of {person} had expired; day pass number {num 100 980} issued.
13> Waiting lane up to the {num 1 6} mark, moving, drivers patient so far.
1> Seal numbers checked against the list and found to agree.
Driver looking for {wharf} sent back by way of {street}.
1> Dangerous goods declaration complete, placards clean and visible.
Porter notes {creature} in the lane; proceeded when it did.
Camera {num 1 24} wiped, mirror adjusted, hedge trimmed.
Customs seal by {officer} at {moment2}; release expected in the course of the shift.
        """,
    ),
    "rounds": topic(
        """
Round {wharf}, {berth} ::
 {hm} round by {officer}: {wharf}, {berth}, {gate}, all doors tried, [nothing to report|one window
 left open|one lamp out].
{creature} at {wharf} ::
 {hm} {creature} on the roadway at {wharf}; left in peace, drivers told by radio.
Safety walk {wharf} ::
 Safety walk at {wharf} with foreman {person}: {num 1 6} remarks, all of them housekeeping.
        """,
        """
Fire extinguishers at {berth2} in date, one hose reel stiff and eased.
Found a {object} by the bollards, taken to lost property, receipt {num 100 980}.
Angler without a licence at {wharf2} sent home with advice and {num 1 4} {fish}.
Lifebuoy {num 1 48} back on its hook after another excursion.
Stacked pallets of {cargo} leaned a little; {firm} asked to restack.
Mooring lines of {ship} slack at low water, ship's watch called, tended.
Two youths on bicycles claimed to be counting bollards; correct count supplied.
Puddle near {substation} is rainwater, tasted by nobody, fed by a gutter.
Next round at {moment} with {officer2} by way of {wharf3}.
        """,
    ),
}
