"""A page that scrolls, with its content no wider than can be read well."""

from __future__ import annotations

from typing import Any

from kivy.metrics import dp
from kivy.uix.anchorlayout import AnchorLayout
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.scrollview import ScrollView
from kivy.uix.widget import Widget

from ui.theme import MARGIN_DP, WORK_WIDTH_DP, space, theme


class Page(ScrollView):
    """Scrolls its one content up and down. What takes drags (the ribbon) gets its touches at once."""

    def __init__(self, content: Widget, **keywords: Any) -> None:
        super().__init__(
            do_scroll_x=False,
            bar_width=dp(4),
            bar_color=(*theme.edge[:3], 0.7),
            bar_inactive_color=(*theme.edge[:3], 0.25),
            scroll_type=["bars", "content"],
            **keywords,
        )
        self.effect_cls = "ScrollEffect"  # no bounce
        self._holder = AnchorLayout(anchor_x="left", anchor_y="top", size_hint_y=None)
        self._column = BoxLayout(
            orientation="vertical",
            size_hint=(None, None),
            padding=(dp(MARGIN_DP), space(5), dp(MARGIN_DP), space(10)),
        )
        self._column.add_widget(content)
        self._column.bind(minimum_height=self._column.setter("height"), height=self._holder.setter("height"))
        self._holder.add_widget(self._column)
        self.add_widget(self._holder)
        self.bind(width=self._fit)
        self._fit()

    def _fit(self, *_: Any) -> None:
        self._column.width = min(self.width, dp(WORK_WIDTH_DP))

    def on_touch_down(self, touch: Any) -> bool:
        """Hand a touch on something that takes drags over at once."""
        if self.collide_point(*touch.pos) and not (touch.is_mouse_scrolling if hasattr(touch, "button") else False):
            for widget in self._holder.walk(restrict=True):
                if getattr(widget, "takes_drags", False) and widget.collide_point(*widget.to_widget(*touch.pos)):
                    touch.push()
                    touch.apply_transform_2d(widget.parent.to_widget)
                    taken = widget.dispatch("on_touch_down", touch)
                    touch.pop()
                    if taken:
                        return True
        return bool(super().on_touch_down(touch))
