import { useLingui } from "@lingui/react";
import { isolate } from "../../../shared/i18n/isolate";
import { Button } from "../../components/button";
import { Status } from "../../components/status";
import { type Count, lastTap, type RoundDraft, type TallyWorker, type Tap } from "./tally";

/** Everybody in noise with two large taps a task: worn, not worn. */
export function TallyRows({
  workers,
  countOf,
  onTap,
}: {
  workers: readonly TallyWorker[];
  countOf: (workerId: string, taskId: string) => Count | undefined;
  onTap: (tap: Tap) => void;
}) {
  const { i18n } = useLingui();
  return (
    <ul className="tally">
      {workers.map(({ id, name, employeeNumber, protector, tasks }) => (
        <li key={id} className="tally-worker">
          <h2>{isolate(name)}</h2>
          <p className="tally-gear">
            {[
              isolate(employeeNumber),
              protector !== null && isolate(protector),
              tasks.every((task) => task.protector === null) && i18n.t("no protector assigned"),
            ]
              .filter(Boolean)
              .join(", ")}
          </p>
          {tasks.map((task) => (
            <div key={task.id} className="tally-task">
              <span className="tally-name" id={`tally-${id}-${task.id}`}>
                {task.name}
                {protector === null && tasks.some((one) => one.protector !== null) && (
                  <span className="tally-gear block">
                    {task.protector === null
                      ? i18n.t("no protector assigned")
                      : isolate(task.protector)}
                  </span>
                )}
              </span>
              <CountWords count={countOf(id, task.id)} />
              {[true, false].map((isWorn) => {
                const word = isWorn ? i18n.t("Worn") : i18n.t("Not worn");
                return (
                  <Button
                    key={word}
                    kind="big"
                    size="worker"
                    aria-label={i18n.t("{word}: {name}, {task}", {
                      word,
                      name: isolate(name),
                      task: task.name,
                    })}
                    onClick={() => onTap({ workerId: id, taskId: task.id, isWorn })}
                  >
                    {word}
                  </Button>
                );
              })}
            </div>
          ))}
        </li>
      ))}
    </ul>
  );
}

function CountWords({ count }: { count: Count | undefined }) {
  const { i18n } = useLingui();
  return (
    <span className={`tally-count${count ? "" : " is-none"}`}>
      {count ? i18n.t("{worn} of {seen} worn", { ...count }) : i18n.t("not seen yet")}
    </span>
  );
}

/** What was tapped last, to be taken back; and on to the sending. It stays at the foot of the window. */
export function TallyFoot({
  draft,
  said,
  onUndo,
  onCheck,
}: {
  draft: RoundDraft;
  /** The last tap in words, said to those who don't see its row. */
  said: string;
  onUndo: () => void;
  onCheck: () => void;
}) {
  const { i18n } = useLingui();
  return (
    <div className="tally-foot">
      <p className="tally-said">
        <Status>{said}</Status>
      </p>
      <Button size="worker" aria-disabled={lastTap(draft) === null} onClick={onUndo}>
        {i18n.t("Undo")}
      </Button>
      <Button size="worker" kind="primary" onClick={onCheck}>
        {i18n.t("Check and send")}
      </Button>
    </div>
  );
}
